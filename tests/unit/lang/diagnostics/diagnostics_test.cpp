#include <catch2/catch.hpp>

#include "lang/diagnostics/diagnostics.h"

using namespace tarn;

namespace {
Span at(std::uint32_t begin) { return {{}, begin, begin + 1}; }
}  // namespace

TEST_CASE("a repetition is kept once") {
  Diagnostics diagnostics;
  diagnostics.report(at(3), diag::unknown_unit, "feet").remedy("use ns");
  diagnostics.report(at(3), diag::unknown_unit, "feet").remedy("not kept");
  diagnostics.report(at(4), diag::unknown_unit, "feet");
  diagnostics.report(at(4), diag::unknown_unit, "inch");
  REQUIRE(diagnostics.all().size() == 3);
  CHECK(diagnostics.all().front().remedy == "use ns");
  CHECK(diagnostics.error_count() == 3);
}

TEST_CASE("warnings are no errors") {
  Diagnostics diagnostics;
  diagnostics.report(at(0), diag::divided_unit, "1/2 us", "1/(2 us)");
  CHECK_FALSE(diagnostics.has_errors());
  CHECK(diagnostics.all().size() == 1);
}

TEST_CASE("there is an end to reports, not to counting") {
  Diagnostics diagnostics;
  for (std::uint32_t i = 0; i < 1000; ++i) diagnostics.report(at(i), diag::nul_character);
  CHECK(diagnostics.all().size() == Diagnostics::kMaxReports);
  CHECK(diagnostics.dropped() == 1000 - Diagnostics::kMaxReports);
  CHECK(diagnostics.error_count() == 1000);
}

TEST_CASE("an error past the end of reports is still an error") {
  Diagnostics diagnostics;
  for (std::uint32_t i = 0; i < Diagnostics::kMaxReports; ++i) diagnostics.report(at(i), diag::divided_unit, "a", "b");
  CHECK_FALSE(diagnostics.has_errors());
  diagnostics.report(at(0), diag::nul_character);
  CHECK(diagnostics.has_errors());
}

TEST_CASE("reports are put in reading order") {
  Diagnostics diagnostics;
  diagnostics.report(at(7), diag::nul_character);
  diagnostics.report(at(2), diag::nul_character);
  const auto sorted = in_text_order(diagnostics);
  CHECK(sorted[0].span.begin == 2);
  CHECK(sorted[1].span.begin == 7);
}

TEST_CASE("messages are lower case, without a full stop") {
  for (const KindInfo& kind : all_kinds()) {
    INFO(kind.name);
    CHECK(kind.name.find_first_not_of("abcdefghijklmnopqrstuvwxyz0123456789_") == std::string_view::npos);
    CHECK_FALSE(kind.message.ends_with('.'));
    CHECK_FALSE((kind.message.front() >= 'A' && kind.message.front() <= 'Z' && !kind.message.starts_with("H ") && !kind.message.starts_with("J(")));
  }
}
