#include <catch2/catch.hpp>

#include "lang/source/loader.h"
#include "tests/unit/lang/source/files.h"

using namespace tarn;

namespace {

std::vector<std::string> kinds_of(const Diagnostics& diagnostics) {
  std::vector<std::string> names;
  for (const Diagnostic& d : diagnostics.all()) names.emplace_back(d.kind);
  return names;
}

using Names = std::vector<std::string>;

}  // namespace

TEST_CASE("a file used twice is one module") {
  const test::Folder folder;
  folder.write("b.tarn", "use \"c.tarn\" as c");
  folder.write("c.tarn", "let x = 1");
  const auto main = folder.write("a.tarn", "use \"b.tarn\" as b\nuse \"./c.tarn\" as c");
  Diagnostics diagnostics;
  const Modules modules = load_modules(main, {}, diagnostics);
  CHECK(kinds_of(diagnostics).empty());
  REQUIRE(modules.modules.size() == 3);
  REQUIRE(modules.modules[0].imports.size() == 2);
  CHECK(modules.modules[0].imports[1].module == modules.modules[1].imports[0].module);
}

TEST_CASE("a file that uses itself is refused") {
  const test::Folder folder;
  const auto main = folder.write("a.tarn", "use \"b.tarn\" as b");
  folder.write("b.tarn", "use \"a.tarn\" as a\nuse \"b.tarn\" as b");
  Diagnostics diagnostics;
  load_modules(main, {}, diagnostics);
  CHECK(kinds_of(diagnostics) == Names{"import_cycle", "import_cycle"});
}

TEST_CASE("the library is read from the program and reads no files") {
  const test::Folder folder;
  const auto main = folder.write("a.tarn", "use one use two use one");
  const LibraryText library[] = {{"one", "use two let x = 1"}, {"two", "use \"a.tarn\" as a use two"}};
  Diagnostics diagnostics;
  const Modules modules = load_modules(main, {library, {}}, diagnostics);
  CHECK(kinds_of(diagnostics) == Names{"file_outside", "import_cycle"});
  CHECK(modules.modules.size() == 3);
  CHECK(modules.sources.file(modules.modules[1].ast.file).name == "<library>/one.tarn");
  CHECK(modules.modules[1].library);
}

TEST_CASE("a main file that cannot be read is reported") {
  const test::Folder folder;
  Diagnostics diagnostics;
  const Modules none = load_modules(folder.path() / "none.tarn", {}, diagnostics);
  CHECK(kinds_of(diagnostics) == Names{"file_missing"});
  CHECK(none.modules.size() == 1);
  Diagnostics second;
  load_modules(folder.path(), {}, second);
  CHECK(kinds_of(second) == Names{"file_not_regular"});
  folder.write("large.tarn", std::string(kLargestModel + 1, ' '));
  Diagnostics third;
  load_modules(folder.path() / "large.tarn", {}, third);
  CHECK(kinds_of(third) == Names{"file_too_large"});
}

TEST_CASE("a file without permission is reported") {
  if (::geteuid() == 0) return;  // The superuser may read everything.
  const test::Folder folder;
  const auto main = folder.write("a.tarn", "");
  std::filesystem::permissions(main, std::filesystem::perms::none);
  Diagnostics diagnostics;
  load_modules(main, {}, diagnostics);
  CHECK(kinds_of(diagnostics) == Names{"file_unreadable"});
}

TEST_CASE("a long chain of files ends in a message") {
  const test::Folder folder;
  for (int i = 0; i < 150; ++i) {
    folder.write("m" + std::to_string(i) + ".tarn", "use \"m" + std::to_string(i + 1) + ".tarn\" as next");
  }
  Diagnostics diagnostics;
  load_modules(folder.path() / "m0.tarn", {}, diagnostics);
  CHECK(kinds_of(diagnostics) == Names{"too_deep"});
}

TEST_CASE("tables are read once, from the naming file's folder, inside the sandbox") {
  const test::Folder folder;
  const auto main = folder.write("m/a.tarn", "use \"sub/b.tarn\" as b");
  folder.write("m/sub/b.tarn", "let x = 1");
  folder.write("m/sub/t.csv", "s,B\n0,1\n");
  folder.write("out.csv", "s,B\n0,1\n");
  Diagnostics diagnostics;
  Modules modules = load_modules(main, {}, diagnostics);
  const Span in_main{modules.modules[0].ast.file, 0, 3};
  const Span in_sub{modules.modules[1].ast.file, 0, 3};
  const Table* table = open_table(modules, "t.csv", in_sub, diagnostics);
  REQUIRE(table != nullptr);
  CHECK(open_table(modules, "sub/t.csv", in_main, diagnostics) == table);
  CHECK(kinds_of(diagnostics).empty());
  CHECK(open_table(modules, "t.csv", in_main, diagnostics) == nullptr);
  CHECK(open_table(modules, "../out.csv", in_main, diagnostics) == nullptr);
  CHECK(open_table(modules, "sub", in_main, diagnostics) == nullptr);
  CHECK(kinds_of(diagnostics) == Names{"file_missing", "file_outside", "file_not_regular"});
}
