#pragma once
/// \file A program or an instance as text: `tarn emit --stage program`, `--stage instance`.

#include <string>

#include "lang/program/program.h"

namespace tarn {

/// Parameters in internal units, laws as expressions, kinds term by term, baths, chips and
/// experiments as they stand in the text.
std::string dump(const Program& program);

/// The chip unrolled, term by term, and the experiment; numbers in internal units.
std::string dump(const Instance& instance);

}  // namespace tarn
