#pragma once
/// \file The plan in words, for `tarn emit --stage plan` and for tests.

#include <string>

#include "runtime/plan/plan.h"

namespace tarn::runtime {

/// One line a fact, indented by part; numbers that depend on parameters appear as their rows.
std::string to_text(const Plan& plan);

/// A word as letters, first placed qubit first: XIZ.
std::string letters(const PauliWord& word, std::size_t qubits);

}  // namespace tarn::runtime
