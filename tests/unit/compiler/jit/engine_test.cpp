#include <catch2/catch.hpp>

#include "compiler/jit/engine.h"
#include "compiler/jit/plugin.h"
#include "tests/unit/compiler/jit/scratch.h"
#include "tests/unit/compiler/support/random_module.h"
#include "tests/unit/compiler/support/reference.h"

using namespace tarn;
using namespace tarn::compiler;
using namespace tarn::test;

TEST_CASE("modules that differ in table numbers only share a kernel", "[jit]") {
  const Scratch scratch;
  EngineOptions options;
  options.cache_directory = scratch.path("cache");
  ir::Module a = random_functions(4, 5), b = a;
  for (double& value : b.tables[0].c[0]) value += 1;
  EngineReport report;
  REQUIRE(compile(a, options, &report));
  REQUIRE(compile(b, options, &report));
  CHECK(report.compiled == 1);
  CHECK(report.cache_hits == 1);
  options.lanes = 2;
  REQUIRE(compile(b, options, &report));
  CHECK(report.compiled == 2);
}

TEST_CASE("kernels from the cache, from memory and in another width agree", "[jit]") {
  const Scratch scratch;
  const ir::Module module = random_functions(9, 7);
  EngineOptions options;
  options.cache_directory = scratch.path("cache");
  const auto linked = compile(module, options);
  options.cache = false;
  const auto in_memory = compile(module, options);
  REQUIRE(linked);
  REQUIRE(in_memory);
  const auto run = [&](const runtime::Kernel& kernel) {
    runtime::InputBlock block(kernel, numbers_of(module));
    block.set_all(std::vector<double>{0.2, 0.8, -0.5});
    const std::vector<double> at{0.1, 0.35, 0.6, 0.77, 0.99};
    std::vector<double> out(at.size() * kernel.rows(0));
    kernel.values(0)(block.block(), at.size(), at.data(), at.data(), at.data(), out.data());
    std::string bytes(reinterpret_cast<const char*>(out.data()), out.size() * sizeof(double));
    return bytes;
  };
  CHECK(run(*linked) == run(*in_memory));
}

TEST_CASE("a kernel's code stays while a copy of the handle lives", "[jit]") {
  EngineOptions options;
  options.cache = false;
  std::optional<runtime::Kernel> kept;
  {
    auto kernel = compile(simple_coefficients(3), options);
    REQUIRE(kernel);
    kept = *kernel;
  }
  const double s = 1;
  double out[3] = {};
  const tarn_block block{nullptr, nullptr};
  CHECK(kept->values(0)(&block, 1, &s, nullptr, nullptr, out) == TARN_OK);
  CHECK(out[2] == 3.5);
}

TEST_CASE("the code generator's products", "[jit]") {
  ir::Module module = simple_coefficients(2);
  add_random_generator(module, 3, 4, 6, true);
  const auto llvm = generate(module, Product::llvm), assembly = generate(module, Product::assembly), object = generate(module, Product::object);
  REQUIRE((llvm && assembly && object));
  CHECK(llvm->find("define i32 @tarn_apply_0") != std::string::npos);
  CHECK(assembly->find("tarn_apply_0:") != std::string::npos);
  CHECK(object->substr(0, 4) == "\x7f" "ELF");
  CHECK(*object == *generate(module, Product::object));
  const Scratch scratch;
  write_file(scratch.path("k.o"), *object);
  REQUIRE(link_kernel(scratch.path("k.o"), scratch.path("k.so")));
  const auto kernel = runtime::Kernel::open(scratch.path("k.so"));
  REQUIRE(kernel);
  CHECK(kernel->find_set("coefficients") == 0u);
  CHECK(kernel->bits(0) == 4);
  CHECK_FALSE(link_kernel(scratch.path("missing.o"), scratch.path("k2.so")));
}

TEST_CASE("without the code generator there is an error that says so", "[jit]") {
  const Scratch scratch;
  EngineOptions options;
  options.cache_directory = scratch.path("cache");
  options.plugin = scratch.path("libtarn_codegen.so");
  CHECK_FALSE(compile(simple_coefficients(1), options));
  write_file(options.plugin, "not a library");
  const auto kernel = compile(simple_coefficients(1), options);
  REQUIRE_FALSE(kernel);
  CHECK(kernel.error().message.find("is not the code generator") != std::string::npos);
  options.cache = false;
  CHECK_FALSE(compile(simple_coefficients(1), options));
}

TEST_CASE("the build id of the plug-in is read without loading it", "[jit]") {
  const auto path = find_plugin();
  REQUIRE(path);
  const auto id = build_id(*path);
  REQUIRE(id);
  CHECK(id->size() == 20);  // SHA-1, as the build asks of the linker
  CHECK_FALSE(build_id("/dev/null").has_value());
}
