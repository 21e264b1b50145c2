#include <catch2/catch.hpp>

#include <sys/stat.h>

#include "lang/source/sandbox.h"
#include "tests/unit/lang/source/files.h"

using namespace tarn;
using Reason = FileError::Reason;

TEST_CASE("a model reads below the folder of its main file") {
  const test::Folder folder;
  const auto main = folder.write("model/main.tarn", "");
  const auto data = folder.write("model/data/a.csv", "");
  const auto outside = folder.write("other/b.csv", "");
  const Sandbox sandbox(main, {});
  CHECK(sandbox.resolve(main, "data/a.csv").value() == data);
  CHECK(sandbox.resolve(data, "../main.tarn").value() == main);
  CHECK(sandbox.resolve(main, "../other/b.csv").error().reason == Reason::outside);
  CHECK(sandbox.resolve(main, outside.string()).error().reason == Reason::outside);
  CHECK(sandbox.resolve(main, "../model2/c.csv").error().reason == Reason::outside);
  CHECK(sandbox.resolve(main, "none.csv").error().reason == Reason::missing);
  CHECK(sandbox.resolve(main, "main.tarn/none.csv").error().reason == Reason::missing);
  CHECK(sandbox.resolve(main, "").error().reason == Reason::missing);
  const Sandbox wider(main, {folder.path() / "other"});
  CHECK(wider.resolve(main, "../other/b.csv").value() == outside);
}

TEST_CASE("links are resolved before they are judged") {
  const test::Folder folder;
  const auto main = folder.write("model/main.tarn", "");
  const auto secret = folder.write("other/secret.csv", "");
  std::filesystem::create_symlink(secret, folder.path() / "model/link.csv");
  std::filesystem::create_directory_symlink(folder.path() / "other", folder.path() / "model/way");
  std::filesystem::create_symlink("main.tarn", folder.path() / "model/fine.tarn");
  std::filesystem::create_symlink("loop.csv", folder.path() / "model/loop.csv");
  const Sandbox sandbox(main, {});
  CHECK(sandbox.resolve(main, "link.csv").error().reason == Reason::outside);
  CHECK(sandbox.resolve(main, "way/secret.csv").error().reason == Reason::outside);
  CHECK(sandbox.resolve(main, "fine.tarn").value() == main);
  CHECK_FALSE(sandbox.resolve(main, "loop.csv").has_value());
}

TEST_CASE("only regular files of bounded size are read") {
  const test::Folder folder;
  const auto file = folder.write("a.csv", "12345");
  CHECK(read_file(file, 5).value() == "12345");
  CHECK(read_file(file, 4).error().reason == Reason::too_large);
  CHECK(read_file(folder.path(), 100).error().reason == Reason::not_regular);
  CHECK(read_file(folder.path() / "none", 100).error().reason == Reason::missing);
  CHECK(read_file("/dev/zero", 100).error().reason == Reason::not_regular);
  const auto pipe = folder.path() / "pipe";
  REQUIRE(::mkfifo(pipe.c_str(), 0600) == 0);
  CHECK(read_file(pipe, 100).error().reason == Reason::not_regular);
}
