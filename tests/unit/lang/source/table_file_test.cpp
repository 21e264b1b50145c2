// The form of the tables: RFC 4180.
#include <catch2/catch.hpp>

#include "lang/quantities/constants.h"
#include "lang/source/table_file.h"

using namespace tarn;

namespace {

struct Read {
  SourceFile file;
  Diagnostics diagnostics;
  std::optional<Table> table;

  explicit Read(std::string text) : file(make_source({}, "t.csv", std::move(text))) {
    table = parse_table(file, {}, diagnostics);
  }
  std::optional<Column> column(std::string_view name) { return read_column(*table, file, name, {}, diagnostics); }
  std::string kind() const { return diagnostics.all().empty() ? "" : std::string(diagnostics.all().back().kind); }
  std::string message() const { return diagnostics.all().back().message; }
  std::string remedy() const { return diagnostics.all().back().remedy; }
};

}  // namespace

TEST_CASE("columns are read with their units and lines") {
  Read read("# invented\r\ns,B [GHz]\r\n\r\n0,1\r\n# between\n0.5 , +2.5e0\n1,\"4\"");
  REQUIRE(read.table);
  CHECK(read.table->rows() == 3);
  const auto b = read.column("B");
  REQUIRE(b);
  CHECK(b->unit.text == "GHz");
  REQUIRE(b->values.size() == 3);
  CHECK(b->values[1] == Approx(2.5 * 2 * kPi));
  CHECK(b->values[2] == Approx(4 * 2 * kPi));
  CHECK(b->lines == std::vector<std::uint32_t>{4, 6, 7});
  CHECK(read.column("B [GHz]")->values == b->values);
  CHECK(read.column("s [ns]")->values == std::vector<double>{0, 0.5, 1});
}

TEST_CASE("quoted cells may hold commas, quotes and line ends") {
  Read read("name,\"x, \"\"y\"\"\"\n\"a\nb\",1\n\"# c\",2\n");
  REQUIRE(read.table);
  CHECK(read.table->header[1] == "x, \"y\"");
  CHECK(read.table->cell(0, 0) == "a\nb");
  CHECK(read.table->line(0, 0) == 3);
  CHECK(read.table->cell(1, 0) == "# c");
  CHECK(read.column("x, \"y\"")->values == std::vector<double>{1, 2});
}

TEST_CASE("a byte order mark is skipped") {
  Read read("\xEF\xBB\xBFs,B\n0,1\n");
  REQUIRE(read.table);
  CHECK(read.table->header.front() == "s");
}

TEST_CASE("faulty tables are refused") {
  CHECK(Read("").kind() == "table_empty");
  CHECK(Read("# only this\n\n").kind() == "table_empty");
  CHECK(Read("s,B\n").kind() == "table_empty");
  CHECK(Read("s,B\n0,1,2\n").kind() == "table_ragged");
  CHECK(Read("s,B\n0,1\n0\n").message() == "line 3 of `t.csv` has 1 cells where the header has 2");
  CHECK(Read("s,B,s\n0,1,2\n").kind() == "table_duplicate");
  CHECK(Read("s,B\n\"0,1\n2,3\n").kind() == "table_quotes");
  CHECK(Read("s,B\n0\"0,1\n2,3\n").kind() == "table_quotes");
}

TEST_CASE("faulty cells are refused where they are read") {
  Read read("s,B [GHz],C [feet],D\n0,,1,nan\n1,x,1,1\n2,2,1,1e999\n");
  REQUIRE(read.table);
  CHECK(read.column("s"));
  CHECK_FALSE(read.column("B"));
  CHECK(read.kind() == "table_hole");
  CHECK_FALSE(read.column("C"));
  CHECK(read.kind() == "table_unit");
  CHECK_FALSE(read.column("D"));
  CHECK(read.kind() == "table_not_number");
  CHECK_FALSE(read.column("B [MHz]"));
  CHECK(read.kind() == "table_units_differ");
  CHECK_FALSE(read.column("E"));
  CHECK(read.kind() == "table_no_column");
  CHECK(read.remedy().find("it has `s`, `B [GHz]`, `C [feet]`, `D`") == 0);
  for (const char* bad : {"0x10", "inf", "1,5", "1 2", "1e", "--1", "+-1", ""}) {
    INFO(bad);
    Read one(std::string("s,B\n0,\"") + bad + "\"\n");
    REQUIRE(one.table);
    CHECK_FALSE(one.column("B"));
  }
}
