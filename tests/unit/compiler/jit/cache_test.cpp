#include <sys/stat.h>
#include <sys/wait.h>
#include <unistd.h>

#include <catch2/catch.hpp>

#include "compiler/jit/digest.h"
#include "compiler/jit/engine.h"
#include "compiler/jit/object_cache.h"
#include "tests/unit/compiler/jit/scratch.h"
#include "tests/unit/compiler/support/random_module.h"

using namespace tarn;
using namespace tarn::compiler;
using namespace tarn::test;

namespace {

ir::Module small_module() {
  ir::Module module = simple_coefficients(2);
  add_random_generator(module, 1, 3, 5, false);
  return module;
}

EngineOptions in_folder(const std::string& folder) {
  EngineOptions options;
  options.cache_directory = folder;
  return options;
}

/// Set 0's first function of small_module() is 0.5 + s.
bool works(const runtime::Kernel& kernel) {
  const double s = 0.25;
  double out[2] = {};
  const tarn_block block{nullptr, nullptr};
  return kernel.values(0)(&block, 1, &s, nullptr, nullptr, out) == TARN_OK && out[0] == 0.75 && out[1] == 1.75;
}

/// Compiles and checks the kernel itself; the report says how it came about.
EngineReport compile_once(const EngineOptions& options) {
  EngineReport report;
  const auto kernel = compile(small_module(), options, &report);
  if (!kernel) FAIL(kernel.error().message);
  CHECK(works(*kernel));
  return report;
}

/// The only entry of a folder.
std::string only_entry(const std::string& folder) {
  const auto files = files_in(folder);
  REQUIRE(files.size() == 1);
  return files[0];
}

}  // namespace

TEST_CASE("SHA-256 of the published example", "[jit]") {
  // FIPS 180-2, appendix B.1.
  CHECK(to_hex(sha256("abc")) == "ba7816bf8f01cfea414140de5dae2223b00361a396177a9cb410ff61f20015ad");
}

TEST_CASE("a kernel is compiled once and then found", "[jit]") {
  const Scratch scratch;
  const std::string folder = scratch.path("a/b/cache");
  const EngineReport first = compile_once(in_folder(folder)), second = compile_once(in_folder(folder));
  CHECK(first.compiled == 1);
  CHECK(first.cache_hits == 0);
  CHECK(second.compiled == 0);
  CHECK(second.cache_hits == 1);
  CHECK((first.remarks.empty() && second.remarks.empty()));
  struct stat info {};
  REQUIRE(stat(folder.c_str(), &info) == 0);
  CHECK((info.st_mode & 0777) == 0700);
  REQUIRE(stat(only_entry(folder).c_str(), &info) == 0);
  CHECK((info.st_mode & 077) == 0);
}

TEST_CASE("where there is no linker the object is kept and linked in memory", "[jit]") {
  const Scratch scratch;
  EngineOptions options = in_folder(scratch.path("cache"));
  options.link = false;
  CHECK(compile_once(options).compiled == 1);
  CHECK(only_entry(scratch.path("cache")).ends_with(".o"));
  CHECK(compile_once(options).cache_hits == 1);
}

TEST_CASE("damaged entries are noticed, replaced and found again", "[jit]") {
  const Scratch scratch;
  const EngineOptions options = in_folder(scratch.path("cache"));
  compile_once(options);
  const std::string entry = only_entry(scratch.path("cache")), sound = read_file(entry);
  std::string damaged = sound;
  SECTION("cut short") { damaged.resize(GENERATE_COPY(std::size_t{0}, std::size_t{1}, std::size_t{71}, sound.size() / 2, sound.size() - 1)); }
  SECTION("one byte flipped") {
    const std::size_t place = GENERATE_COPY(std::size_t{0}, std::size_t{100}, sound.size() / 2, sound.size() - 80, sound.size() - 20, sound.size() - 1);
    damaged[place] = static_cast<char>(damaged[place] ^ 1);
  }
  SECTION("something else") { damaged = std::string(5000, 'x'); }
  SECTION("longer than it was") { damaged += "tail"; }
  std::filesystem::remove(entry);
  write_file(entry, damaged);
  chmod(entry.c_str(), 0600);
  const EngineReport report = compile_once(options);
  CHECK(report.compiled == 1);
  CHECK(report.replaced == 1);
  CHECK(report.remarks.size() == 1);
  CHECK(read_file(entry) == sound);
  CHECK(compile_once(options).cache_hits == 1);
}

TEST_CASE("a sound entry under another's name is not taken for it", "[jit]") {
  const Scratch scratch;
  const EngineOptions options = in_folder(scratch.path("cache"));
  compile_once(options);
  const std::string entry = only_entry(scratch.path("cache"));
  std::filesystem::rename(entry, scratch.path("moved"));
  ir::Module other = small_module();
  other.name = "other";
  REQUIRE(compile(other, options));
  std::filesystem::copy(only_entry(scratch.path("cache")), entry);
  CHECK(compile_once(options).replaced == 1);
}

TEST_CASE("an entry others may write to is not used", "[jit]") {
  const Scratch scratch;
  const EngineOptions options = in_folder(scratch.path("cache"));
  compile_once(options);
  REQUIRE(chmod(only_entry(scratch.path("cache")).c_str(), 0666) == 0);
  CHECK(compile_once(options).replaced == 1);
  CHECK(compile_once(options).cache_hits == 1);
}

TEST_CASE("a link in the place of an entry is not followed", "[jit]") {
  const Scratch scratch;
  const EngineOptions options = in_folder(scratch.path("cache"));
  compile_once(options);
  const std::string entry = only_entry(scratch.path("cache"));
  std::filesystem::rename(entry, scratch.path("elsewhere"));
  std::filesystem::create_symlink(scratch.path("elsewhere"), entry);
  CHECK(compile_once(options).replaced == 1);
  CHECK_FALSE(std::filesystem::is_symlink(entry));
}

TEST_CASE("a folder others may write to, or none at all, is a remark", "[jit]") {
  const Scratch scratch;
  const std::string folder = scratch.path("open");
  SECTION("writable by all") {
    std::filesystem::create_directory(folder);
    REQUIRE(chmod(folder.c_str(), 0777) == 0);
  }
  SECTION("a file") { write_file(folder, "no folder"); }
  const EngineReport report = compile_once(in_folder(folder));
  CHECK(report.compiled == 1);
  CHECK(report.remarks.size() == 1);
}

TEST_CASE("a folder that nothing can be written to is a remark", "[jit]") {
  // /proc refuses new files to everyone; a read-only folder would not stop root.
  const EngineReport report = compile_once(in_folder("/proc/self/task"));
  CHECK(report.compiled == 1);
  CHECK(report.remarks.size() == 1);
}

TEST_CASE("processes that fill one entry at once all get a kernel, and leave one file", "[jit]") {
  const Scratch scratch;
  const EngineOptions options = in_folder(scratch.path("cache"));
  std::vector<pid_t> children;
  for (int k = 0; k < 4; ++k) {
    const pid_t child = fork();
    if (child == 0) {
      const auto kernel = compile(small_module(), options);
      _exit(kernel && works(*kernel) ? 0 : 1);
    }
    children.push_back(child);
  }
  for (const pid_t child : children) {
    int status = -1;
    REQUIRE(waitpid(child, &status, 0) == child);
    CHECK(status == 0);
  }
  CHECK(only_entry(scratch.path("cache")).ends_with(".so"));
  CHECK(compile_once(options).cache_hits == 1);
}

TEST_CASE("the folder comes from the environment, absolute paths only", "[jit]") {
  const auto with = [](const char* own, const char* base, const char* home) {
    own ? setenv("TARN_CACHE_DIR", own, 1) : unsetenv("TARN_CACHE_DIR");
    base ? setenv("XDG_CACHE_HOME", base, 1) : unsetenv("XDG_CACHE_HOME");
    home ? setenv("HOME", home, 1) : unsetenv("HOME");
    return default_cache_directory();
  };
  const std::string home = std::getenv("HOME") ? std::getenv("HOME") : "";
  CHECK(with("/own", "/base", "/home/me") == "/own");
  CHECK(with("relative", "/base", "/home/me") == "/base/tarn");
  CHECK(with(nullptr, nullptr, "/home/me") == "/home/me/.cache/tarn");
  CHECK(with(nullptr, "", nullptr).empty());
  with(nullptr, nullptr, home.c_str());
}
