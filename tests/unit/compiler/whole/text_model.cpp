#include "tests/unit/compiler/whole/text_model.h"

#include <catch2/catch.hpp>

#include "lang/source/library.h"

namespace tarn::test {
namespace {

void require_no_errors(const Diagnostics& diagnostics) {
  for (const Diagnostic& diagnostic : in_text_order(diagnostics)) {
    if (diagnostic.severity == Severity::error) FAIL(diagnostic.kind << ": " << diagnostic.message);
  }
}

}  // namespace

TextModel text_model(const std::string& text, const std::filesystem::path& folder, const Overrides& overrides) {
  Diagnostics diagnostics;
  Program program = check(load_text("test.tarn", text, folder, {standard_library(), {}}, diagnostics), diagnostics);
  require_no_errors(diagnostics);
  auto all = instances(program, 0, overrides, diagnostics);
  require_no_errors(diagnostics);
  REQUIRE(all.size() == 1);
  return {std::move(program), std::move(all.front())};
}

}  // namespace tarn::test
