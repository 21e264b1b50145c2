#include <catch2/catch.hpp>

#include "runtime/experiment/pace.h"

using namespace tarn;
using namespace tarn::runtime;

namespace {

Setting at(std::uint32_t row) { return {row, {"model.tarn", row + 1, 3, 9}}; }

}  // namespace

TEST_CASE("a pace of ramp, hold, step and ramp back") {
  const std::vector<double> settings = {0.25, 0.75, 10, 5, 0.5, 0.0, 20};
  const std::vector<PacePiece> pieces = {PaceStart{at(0)}, PaceRamp{at(1), at(2)}, PaceHold{at(3)}, PaceStep{at(4)},
                                         PaceRamp{at(5), at(6)}};
  const auto pace = work_out_pace(pieces, settings);
  REQUIRE(pace);
  const Timeline& line = *pace;
  CHECK(line.first_s == 0.25);
  CHECK(line.last_s == 0.0);
  CHECK(line.duration() == 35);
  CHECK(s_at(line, 0) == 0.25);
  CHECK(s_at(line, 5) == Approx(0.5));
  CHECK(s_at(line, 12) == 0.75);
  CHECK(s_at(line, 15) == 0.5);  // a step: the value after it
  CHECK(s_at(line, 25) == Approx(0.25));
  CHECK(s_at(line, 99) == 0.0);
  CHECK(range_of_s(line).highest == 0.75);

  SECTION("when s is met, first and last") {
    CHECK(instant_of_s(line, 0.5, false)->t == Approx(5));
    CHECK(instant_of_s(line, 0.5, true)->t == Approx(15));
    CHECK(instant_of_s(line, 0.75, false)->t == Approx(10));
    CHECK(instant_of_s(line, 0.75, true)->t == Approx(15));
    CHECK(instant_of_s(line, 0.0, false)->t == Approx(35));
    CHECK_FALSE(instant_of_s(line, 0.9, false));
    CHECK(instant_of_s(line, 0.25, true)->t == Approx(25));
  }
  SECTION("instants even in t have both ends exactly") {
    const auto instants = even_instants(line, 8);
    REQUIRE(instants.size() == 8);
    CHECK(instants.front().t == 0);
    CHECK(instants.back().t == line.duration());
    CHECK(instants[1].t == Approx(5));
    CHECK(instants.back().s == 0);
  }
  SECTION("positions become times inside moving segments only") {
    const std::vector<double> positions = {0.5, 0.75, 0.1};
    const auto times = times_of_positions(line, positions);
    REQUIRE(times.size() == 2);
    CHECK(times[0] == Approx(5));
    CHECK(times[1] == Approx(31));
  }
}

TEST_CASE("a step at once starts from the first s") {
  const std::vector<double> settings = {0.4, 3};
  const auto pace = work_out_pace({PaceStep{at(0)}, PaceHold{at(1)}}, settings);
  REQUIRE(pace);
  CHECK(pace->first_s == 0);
  CHECK(s_at(*pace, 0) == 0.4);
  CHECK(pace->segments.size() == 1);
}

TEST_CASE("start alone is static") {
  const std::vector<double> settings = {0.4};
  const auto pace = work_out_pace({PaceStart{at(0)}}, settings);
  REQUIRE(pace);
  CHECK(pace->segments.empty());
  CHECK(pace->first_s == 0.4);
  CHECK(even_instants(*pace, 11).size() == 1);
  CHECK(instant_of_s(*pace, 0.4, false)->t == 0);
}

TEST_CASE("a followed waveform sets the first s") {
  const auto pace = work_out_pace({PaceFollow{{0, 1, 4}, {0.2, 0.6, 0.3}, {}}}, {});
  REQUIRE(pace);
  CHECK(pace->first_s == 0.2);
  CHECK(s_at(*pace, 2.5) == Approx(0.45));
  CHECK(work_out_pace({PaceFollow{{0, 1, 1}, {0.2, 0.6, 0.3}, {}}}, {}).error().kind == "pace_not_ascending");
}

TEST_CASE("numbers that make no pace are errors with their place") {
  const std::vector<double> settings = {1.25, -3, 0.5, NAN};
  const auto outside = work_out_pace({PaceRamp{at(0), at(2)}}, settings);
  REQUIRE_FALSE(outside);
  CHECK(outside.error().kind == "s_out_of_range");
  CHECK(outside.error().place.line == 1);
  CHECK(work_out_pace({PaceHold{at(1)}}, settings).error().kind == "negative_time");
  CHECK(work_out_pace({PaceRamp{at(2), at(3)}}, settings).error().kind == "not_finite");
  CHECK(work_out_pace({PaceRamp{at(2), at(3)}}, settings).error().place.line == 4);
}
