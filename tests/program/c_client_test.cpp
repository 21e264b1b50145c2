// A C program built from the emitted header and object computes H psi of a chip of three qubits.
#include <catch2/catch.hpp>
#include <cmath>
#include <complex>
#include <cstdio>
#include <cstdlib>
#include <sstream>

#include "tests/program/process.h"

using namespace tarn::testing;

namespace {

using Complex = std::complex<double>;
const double kGHz = 2 * std::acos(-1.0);  // rad/ns

/// Arguments: s, and a value for each input in order. Prints the amplitudes of H psi for
/// psi[i] = (i + 1) + (2 i - 3) i.
const char* const kClient = R"(
#include "model.h"
#include <stdio.h>
#include <stdlib.h>

typedef void (*code)(void);

static code find(uint32_t kind, uint32_t index) {
  uint32_t k;
  for (k = 0; k < tarn_kernel_table.entries; ++k)
    if (tarn_kernel_table.entry[k].kind == kind && tarn_kernel_table.entry[k].index == index)
      return tarn_kernel_table.entry[k].code;
  exit(3);
}

static double* doubles(size_t count) {
  char* raw = malloc(8 * count + 64);
  if (raw == NULL) exit(4);
  return (double*)(raw + (64 - (size_t)(uintptr_t)raw % 64));
}

int main(int argc, char** argv) {
  const uint32_t lanes = tarn_kernel_table.lanes;
  const tarn_generator* h = &tarn_kernel_table.generator[tarn_generator_hamiltonian];
  const size_t size = (size_t)1 << h->bits;
  double *inputs = doubles(tarn_kernel_table.inputs * lanes), *prepared = doubles(h->prepared_doubles + 1);
  double *coefficients = doubles(tarn_kernel_table.set[tarn_set_coefficients].rows + 1);
  double *x = doubles(2 * size), *y = doubles(2 * size), s;
  tarn_block block = {NULL, NULL};
  size_t i;
  if (tarn_kernel_table.abi_version != TARN_ABI_VERSION || argc != 2 + (int)tarn_kernel_table.inputs) return 2;
  s = strtod(argv[1], NULL);
  for (i = 0; i < tarn_kernel_table.inputs * lanes; ++i) inputs[i] = strtod(argv[2 + i / lanes], NULL);
  block.inputs = inputs;
#ifdef TABLES
  block.tables = tarn_model_tables;
#endif
  if (((tarn_values_fn)find(TARN_VALUES, tarn_set_coefficients))(&block, 1, &s, NULL, NULL, coefficients) != TARN_OK) return 5;
  if (((tarn_prepare_fn)find(TARN_PREPARE, tarn_generator_hamiltonian))(prepared) != TARN_OK) return 6;
  for (i = 0; i < size; ++i) {
    x[2 * i] = (double)i + 1;
    x[2 * i + 1] = 2 * (double)i - 3;
  }
  if (((tarn_apply_fn)find(TARN_APPLY, tarn_generator_hamiltonian))(coefficients, prepared, x, y) != TARN_OK) return 7;
  for (i = 0; i < size; ++i) printf("%.17g %.17g\n", y[2 * i], y[2 * i + 1]);
  return 0;
}
)";

std::string model_text(const std::string& problem) {
  return "parameter weak : number = -0.4 in -1 .. 1\nschedule A(s) = 6 GHz*(1 - s)^2\nschedule B(s) = " + problem +
         "\nqubit site(h : number) { energy -A(s)/2*X + B(s)/2*h*Z }\n"
         "coupler link(J : number) { energy B(s)/2*J*ZZ + 0.1 GHz*XY }\n"
         "chip three {\n qubit q[i] : site(h = 0.2*i - 0.1) for i in 0 .. 2\n coupler q[0] -- q[1] : link(-1)\n"
         " coupler q[1] -- q[2] : link(weak)\n}\nexperiment run { chip three scan s over linear(0, 1, 3) observe gap }\n";
}

std::string output_of(const std::string& command) {
  FILE* const pipe = popen((command + " 2>&1").c_str(), "r");
  REQUIRE(pipe != nullptr);
  std::string text;
  for (int c = 0; (c = std::fgetc(pipe)) != EOF;) text += static_cast<char>(c);
  const int status = pclose(pipe);
  INFO(command << "\n" << text);
  REQUIRE(status == 0);
  return text;
}

/// H psi by hand: each term by what it does to a bit string, the first qubit its leftmost letter.
std::vector<Complex> expected(double a, double b, double weak) {
  std::vector<Complex> psi(8), result(8);
  for (std::size_t i = 0; i < 8; ++i) psi[i] = {static_cast<double>(i) + 1, 2 * static_cast<double>(i) - 3};
  const double h[] = {-0.1, 0.1, 0.3}, J[] = {-1, weak};
  const auto bit = [](std::size_t q) { return std::size_t{4} >> q; };
  const auto sign = [&](std::size_t i, std::size_t q) { return (i & bit(q)) != 0 ? -1.0 : 1.0; };
  for (std::size_t i = 0; i < 8; ++i) {
    for (std::size_t q = 0; q < 3; ++q) {
      result[i] += b / 2 * h[q] * sign(i, q) * psi[i];
      result[i ^ bit(q)] += -a / 2 * psi[i];
    }
    for (std::size_t q = 0; q < 2; ++q) {
      result[i] += b / 2 * J[q] * sign(i, q) * sign(i, q + 1) * psi[i];
      // Y|0> = i|1>, Y|1> = -i|0>
      result[i ^ bit(q) ^ bit(q + 1)] += 0.1 * kGHz * Complex(0, sign(i, q + 1)) * psi[i];
    }
  }
  return result;
}

/// Emits, builds and runs; the amplitudes printed.
std::vector<Complex> of_client(const Scratch& scratch, const std::string& s, const std::string& weak, const std::string& flags) {
  const std::string folder = scratch.path().string() + "/";
  for (const char* stage : {"header", "object"}) {
    const std::string file = std::string(stage) == "header" ? "model.h" : "model.o";
    const Outcome outcome = run_tarn({"emit", "m.tarn", "--stage", stage, "--out", file}, scratch.path());
    INFO(outcome.err);
    REQUIRE(outcome.status == 0);
  }
  scratch.write("client.c", kClient);
  output_of("cc -std=c99 -Wall -Wextra -Wpedantic -Werror " + flags + " -I" + folder + " " + folder + "client.c " + folder +
            "model.o -o " + folder + "client -lmvec -lm");
  // Inputs in the order of the header: the parameter, whether offsets are on, and what is read at run time.
  std::istringstream lines(output_of(folder + "client " + s + " " + weak + " 1 0 0"));
  std::vector<Complex> result;
  for (double re = 0, im = 0; lines >> re >> im;) result.emplace_back(re, im);
  return result;
}

void check_equal(const std::vector<Complex>& got, const std::vector<Complex>& wanted) {
  REQUIRE(got.size() == wanted.size());
  for (std::size_t i = 0; i < got.size(); ++i) {
    INFO("amplitude " << i << ": " << got[i] << " for " << wanted[i]);
    CHECK(std::abs(got[i] - wanted[i]) < 1e-12 * 100);
  }
}

}  // namespace

TEST_CASE("a C program gets H psi from the emitted object") {
  const Scratch scratch;
  scratch.write("m.tarn", model_text("9 GHz*s"));
  check_equal(of_client(scratch, "0.3", "0.55", ""), expected(6 * kGHz * 0.7 * 0.7, 9 * kGHz * 0.3, 0.55));
}

TEST_CASE("a C program finds the numbers of tables in the header") {
  const Scratch scratch;
  scratch.write("b.csv", "s,B [GHz]\n0,0.5\n0.25,1.5\n1,9\n");
  scratch.write("m.tarn", model_text("table(\"b.csv\", \"s\", \"B [GHz]\")"));
  // Straight lines: B(0.55) = 1.5 + (9 - 1.5) 0.3/0.75, and the end value beyond the table.
  check_equal(of_client(scratch, "0.55", "-0.4", "-DTABLES"), expected(6 * kGHz * 0.45 * 0.45, 4.5 * kGHz, -0.4));
  check_equal(of_client(scratch, "1.5", "-0.4", "-DTABLES"), expected(6 * kGHz * 0.25, 9 * kGHz, -0.4));
}
