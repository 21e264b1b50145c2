#include <catch2/catch.hpp>
#include <cstdio>
#include <cstdlib>
#include <sstream>

#include "compiler/codegen/header.h"
#include "compiler/passes/pipeline.h"
#include "tests/unit/compiler/codegen/compiled.h"
#include "tests/unit/compiler/jit/scratch.h"
#include "tests/unit/compiler/support/random_module.h"
#include "tests/unit/compiler/support/reference.h"

using namespace tarn;
using namespace tarn::test;

namespace {

/// What a C program, built from the emitted header and object, prints.
const char* const kProgram = R"(
#include "model.h"
#include <stdio.h>
#include <stdlib.h>

static void (*find(uint32_t kind, uint32_t index))(void) {
  uint32_t k;
  for (k = 0; k < tarn_kernel_table.entries; ++k)
    if (tarn_kernel_table.entry[k].kind == kind && tarn_kernel_table.entry[k].index == index)
      return tarn_kernel_table.entry[k].code;
  return NULL;
}

int main(void) {
  const uint32_t lanes = tarn_kernel_table.lanes, rows = tarn_kernel_table.set[tarn_set_coefficients].rows;
  const tarn_generator* h = &tarn_kernel_table.generator[tarn_generator_G0];
  const size_t doubles = (size_t)2 << h->bits;
  const double given[] = {0.2, 0.8, -0.5}, at = 0.3;
  double inputs[24], coefficients[64];
  double* prepared = aligned_alloc(64, 64 * (h->prepared_doubles / 8 + 1));
  double *x = aligned_alloc(64, 8 * doubles), *y = aligned_alloc(64, 8 * doubles);
  tarn_block block;
  size_t i;
  for (i = 0; i < 3 * lanes; ++i) inputs[i] = given[i / lanes];
  block.inputs = inputs;
  block.tables = tarn_model_tables;
  if (((tarn_values_fn)find(TARN_VALUES, 0))(&block, 1, &at, &at, &at, coefficients) != TARN_OK || rows > 64) return 1;
  for (i = 0; i < doubles; ++i) x[i] = 0.1 * (double)i - 0.4;
  ((tarn_prepare_fn)find(TARN_PREPARE, 0))(prepared);
  ((tarn_apply_fn)find(TARN_APPLY, 0))(coefficients, prepared, x, y);
  for (i = 0; i < doubles; ++i) printf("%a\n", y[i]);
  return tarn_input_a == 0 && tarn_row_0_f1 == 1 ? 0 : 2;
}
)";

ir::Module model() {
  unsigned seed = 0;
  for (;; ++seed) {  // the first whose functions are all finite where they are read
    ir::Module module = random_functions(seed, 3);
    const auto values = interpret(module, std::vector<double>{0.2, 0.8, -0.5}, {0.3, 0.3, 0.3});
    bool finite = true;
    for (const auto& function : module.sets[0].functions) finite = finite && std::isfinite(values[function.value.row]);
    if (!finite) continue;
    add_random_generator(module, seed, 4, 9, false);
    return module;
  }
}

std::string output_of(const std::string& command) {
  FILE* const pipe = popen(command.c_str(), "r");
  REQUIRE(pipe != nullptr);
  std::string text;
  for (int c = 0; (c = std::fgetc(pipe)) != EOF;) text += static_cast<char>(c);
  INFO(command << "\n" << text);
  REQUIRE(pclose(pipe) == 0);
  return text;
}

}  // namespace

TEST_CASE("a C program built from the emitted header gets the same H psi", "[codegen]") {
  const ir::Module module = model();
  const Scratch scratch;
  const auto object = compiler::generate(module, compiler::Product::object);
  REQUIRE(object);
  write_file(scratch.path("model.o"), *object);
  write_file(scratch.path("model.h"), compiler::c_header(module));
  write_file(scratch.path("main.c"), kProgram);
  output_of("cc -std=c11 -Wall -Wextra -Wpedantic -Werror -I" + scratch.path() + " " + scratch.path("main.c") + " " +
            scratch.path("model.o") + " -o " + scratch.path("main") + " -lmvec -lm 2>&1");
  std::istringstream printed(output_of(scratch.path("main")));

  const runtime::Kernel kernel = compiled(module);
  runtime::InputBlock block(kernel, numbers_of(module));
  block.set_all(std::vector<double>{0.2, 0.8, -0.5});
  const double at = 0.3;
  std::vector<double> coefficients(kernel.rows(0));
  REQUIRE(kernel.values(0)(block.block(), 1, &at, &at, &at, coefficients.data()) == TARN_OK);
  Doubles prepared(kernel.prepared_doubles(0) + 1), x(32), y(32);
  for (std::size_t i = 0; i < x.size(); ++i) x[i] = 0.1 * static_cast<double>(i) - 0.4;
  kernel.prepare(0)(prepared.data());
  kernel.apply(0)(coefficients.data(), prepared.data(), x.data(), y.data());
  for (std::size_t i = 0; i < y.size(); ++i) {
    std::string line;
    REQUIRE(std::getline(printed, line));
    CHECK(std::strtod(line.c_str(), nullptr) == y[i]);
  }
}

TEST_CASE("names of any kind become identifiers of their own", "[codegen]") {
  ir::Module module = simple_coefficients(1);
  module.inputs = {"a b", "a-b", "a_b", "*/ #error"};
  const std::string header = compiler::c_header(module);
  for (const char* const line : {"tarn_input_a_b = 0,", "tarn_input_a_b_2 = 1,", "tarn_input_a_b_3 = 2,", "tarn_input_____error = 3"})
    CHECK(header.find(line) != std::string::npos);
  CHECK(header.find("*/ #error") == std::string::npos);
}
