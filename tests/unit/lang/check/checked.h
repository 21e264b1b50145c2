#pragma once
/// \file Texts checked in tests: messages by kind, and instances.

#include <chrono>
#include <filesystem>
#include <string>
#include <string_view>
#include <vector>

#include "lang/check/check.h"
#include "lang/source/library.h"

namespace tarn::test {

struct Checked {
  Diagnostics diagnostics;
  Program program;
};

inline Checked check_text(std::string text, const std::filesystem::path& folder = std::filesystem::temp_directory_path()) {
  Checked result;
  result.program = check(load_text("test.tarn", std::move(text), folder, {standard_library(), {}}, result.diagnostics), result.diagnostics);
  return result;
}

/// Kinds in reading order.
inline std::vector<std::string> kinds(const Diagnostics& diagnostics) {
  std::vector<std::string> result;
  for (const Diagnostic& diagnostic : in_text_order(diagnostics)) result.emplace_back(diagnostic.kind);
  return result;
}

/// Kinds that a text causes.
inline std::vector<std::string> kinds_of(std::string text) { return kinds(check_text(std::move(text)).diagnostics); }

/// A one-qubit experiment around a qubit kind's body.
inline std::string with_qubit(std::string_view body, std::string_view statements = "scan s over linear(0, 1, 3) observe gap") {
  return fmt::format("qubit site {{ {} }}\nchip one {{ qubit q : site }}\nexperiment run {{ chip one {} }}\n", body, statements);
}

/// The one instance of the one experiment.
inline Instance instance_of(std::string text, const Overrides& overrides = {}) {
  Checked checked = check_text(std::move(text));
  auto made = instantiate(checked.program, 0, overrides, checked.diagnostics);
  return made ? *made : Instance{};
}

}  // namespace tarn::test
