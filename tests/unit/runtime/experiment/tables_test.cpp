#include <catch2/catch.hpp>

#include <cmath>
#include <cstdlib>
#include <filesystem>
#include <fstream>
#include <nlohmann/json.hpp>
#include <numbers>

#include "runtime/experiment/folder.h"
#include "runtime/experiment/grid.h"
#include "runtime/experiment/tables.h"

using namespace tarn;
using namespace tarn::runtime;
namespace fs = std::filesystem;

namespace {

constexpr double kGigahertz = 2 * std::numbers::pi;

Plan sample_plan() {
  Plan plan;
  plan.chip.qubits = {{"a", {}}, {"b", {}}};
  plan.axes = {{{{"ta", 0u, {"ns", 1}, {10, 100}}}},
               {{{"f", 1u, {"GHz", kGigahertz}, {0.1 * kGigahertz, 5 * kGigahertz}},
                 {"n", std::nullopt, {"", 1}, {3, 4}}}}};
  Observable energy, trace, hidden;
  energy.name = "e, \"low\"";
  energy.unit = {"GHz", kGigahertz};
  energy.moment = AtEnd{};
  trace.name = "z";
  trace.moment = Along{2};
  hidden.name = "h";
  hidden.moment = AtEnd{};
  hidden.shown = false;
  plan.observables = {energy, trace, hidden};
  plan.distribution_at_end = true;
  plan.points = {0, 1, 2, 3};
  return plan;
}

PointOutcome sample_point(std::uint64_t index) {
  PointOutcome point;
  point.index = index;
  const double x = 0.1 + static_cast<double>(index) / 3;
  point.series = {{{{0, 0}, {x, 1e-7 * x}}}, {{{0, 0}, {1, 0}}, {{10, 1}, {x / 7, 3e-9}}}, {{{0, 0}, {5, 0}}}};
  point.distribution = {{0.25, 1e-9}, {0.5, 0}, {0.125, 0}, {0.125, 0}};
  return point;
}

fs::path empty_folder() {
  std::string name = (fs::temp_directory_path() / "tarn-folder-XXXXXX").string();
  REQUIRE(mkdtemp(name.data()) != nullptr);
  return name;
}

}  // namespace

TEST_CASE("positions in a grid, first axis slowest") {
  const Plan plan = sample_plan();
  CHECK(grid_size(plan.axes) == 4);
  CHECK(grid_position(plan.axes, 2) == std::vector<std::size_t>{1, 0});
  CHECK(grid_values(plan.axes, 3) == std::vector<double>{100, 5 * kGigahertz, 4});
  CHECK(grid_size({}) == 1);
  CHECK(sample_of_grid(10, 4) == std::vector<std::uint64_t>{0, 3, 6, 9});
  CHECK(sample_of_grid(3, 9) == std::vector<std::uint64_t>{0, 1, 2});
  CHECK(sample_of_grid(7, 1) == std::vector<std::uint64_t>{0});
}

TEST_CASE("CSV by RFC 4180") {
  const CsvTable table{{"a", "b \"x\""}, {{"1,5", "two\nlines"}, {"", "3"}}};
  CHECK(to_csv(table) == "a,\"b \"\"x\"\"\"\r\n\"1,5\",\"two\nlines\"\r\n,3\r\n");
  const auto back = parse_csv(to_csv(table));
  REQUIRE(back);
  CHECK(back->header == table.header);
  CHECK(back->rows == table.rows);
  CHECK_FALSE(parse_csv("a,b\n1\n"));
  CHECK_FALSE(parse_csv("a\n\"open\n"));
}

TEST_CASE("numbers are the shortest that read back the same") {
  CHECK(number_text(0.1) == "0.1");
  CHECK(number_text(1.0 / 3) == "0.3333333333333333");
  CHECK(number_text(NAN).empty());
  for (const double x : {0.1 + 0.2, 1e-300, -5e22, 123456789.123456789}) CHECK(*field_number(number_text(x)) == x);
  CHECK_FALSE(field_number("1x"));
  CHECK(parameter_text(15 * 0.130920339127, {"mK", 0.130920339127}) == "15");
  CHECK(parameter_text(0.1 * kGigahertz, {"GHz", kGigahertz}) == "0.1");
}

TEST_CASE("tables have the keys, answers, errors and the status") {
  const Plan plan = sample_plan();
  PointOutcome first = sample_point(0), failed = sample_point(1);
  failed.series.clear();
  failed.distribution.clear();
  failed.error = RunError{"not_finite", "the state is not finite"};
  failed.status = "not_finite: the state is not finite";
  const std::vector<const PointOutcome*> points = {&first, &failed};
  const std::vector<const Plan*> plans = {&plan, &plan};
  const ResultTables tables = make_tables(points, plans, plan);
  REQUIRE(tables.size() == 3);
  const CsvTable& results = tables.at("results.csv");
  CHECK(results.header == std::vector<std::string>{"ta [ns]", "f [GHz]", "n", "e, \"low\" [GHz]",
                                                   "e, \"low\" error [GHz]", "status"});
  REQUIRE(results.rows.size() == 2);
  CHECK(results.rows[0][1] == "0.1");
  CHECK(results.rows[0].back() == "ok");
  CHECK(results.rows[1][3].empty());
  CHECK(results.rows[1].back() == "not_finite: the state is not finite");
  const CsvTable& traces = tables.at("traces.csv");
  CHECK(traces.header == std::vector<std::string>{"ta [ns]", "f [GHz]", "n", "t [ns]", "s", "z", "z error"});
  CHECK(traces.rows.size() == 2);
  CHECK(tables.at("distribution.csv").rows[2] == std::vector<std::string>{"10", "0.1", "3", "10", "0.125", "0"});
}

TEST_CASE("points read back from their tables are the points, bit by bit") {
  const Plan plan = sample_plan();
  std::vector<PointOutcome> all;
  for (const std::uint64_t index : {0u, 1u, 3u}) all.push_back(sample_point(index));
  all[1].status = kStatusLoose;
  for (PointOutcome& point : all) round_to_shown(plan, point);
  const std::vector<const PointOutcome*> points = {&all[0], &all[1], &all[2]};
  const std::vector<const Plan*> plans(4, &plan);
  const ResultTables tables = make_tables(points, std::span(plans).first(3), plan);
  const auto back = read_tables(tables, plan.points, plans);
  REQUIRE(back);
  REQUIRE(back->size() == 3);
  CHECK_FALSE(back->contains(2));
  const PointOutcome& again = back->at(3);
  CHECK(again.series[0][0].answer.value == all[2].series[0][0].answer.value);
  CHECK(again.series[0][0].answer.error == all[2].series[0][0].answer.error);
  CHECK(again.series[1][1].answer.value == all[2].series[1][1].answer.value);
  CHECK(again.series[1][1].at.t == 10);
  CHECK(again.distribution[0].value == 0.25);
  CHECK(back->at(1).status == kStatusLoose);

  ResultTables other = tables;
  other["results.csv"].header[0] = "tb [ns]";
  CHECK_FALSE(read_tables(other, plan.points, plans));
}

TEST_CASE("a folder is continued with its own key and refused otherwise, untouched") {
  const fs::path folder = empty_folder() / "run";
  const nlohmann::ordered_json key = {{"version", "0.1"}}, other = {{"version", "0.2"}};
  REQUIRE(inspect_folder(folder, key));
  CHECK_FALSE(fs::exists(folder));
  nlohmann::ordered_json record = {{"key", key}};
  REQUIRE(write_folder(folder, {{"results.csv", "a\r\n1\r\n"}, {"run.json", record.dump()}}));
  const auto contents = inspect_folder(folder, key);
  REQUIRE(contents);
  CHECK(contents->at("results.csv") == "a\r\n1\r\n");
  CHECK(inspect_folder(folder, other).error().kind == "other_key");
  std::ofstream(folder / "notes.txt") << "mine";
  CHECK(inspect_folder(folder, key).error().kind == "foreign_file");
  fs::remove(folder / "notes.txt");
  std::ofstream(folder / "results.csv.part") << "left behind";
  CHECK(inspect_folder(folder, key));
  fs::remove(folder / "run.json");
  CHECK(inspect_folder(folder, key).error().kind == "foreign_file");
  fs::remove_all(folder.parent_path());
}
