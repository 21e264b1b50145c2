/// \file How fast compiled kernels are, as ratios within one run: H psi against the least memory
/// traffic it can have and against a sparse matrix; stages; lanes; expressions.

#include <Eigen/Sparse>
#include <bit>
#include <cmath>
#include <complex>
#include <cstdio>
#include <cstdlib>
#include <string>

#include "compiler/jit/engine.h"
#include "compiler/passes/pipeline.h"
#include "tests/bench/measure.h"
#include "tests/unit/compiler/support/random_module.h"

using namespace tarn;
using namespace tarn::bench;
using Complex = std::complex<double>;

namespace {

runtime::Kernel kernel_of(const ir::Module& module) {
  compiler::EngineOptions options;
  options.cache = false;
  auto kernel = compiler::compile(compiler::optimize(module), options);
  if (!kernel) {
    std::fprintf(stderr, "%s\n", kernel.error().message.c_str());
    std::exit(1);
  }
  return *kernel;
}

/// A ring with fields: -c0/2 sum X + c1 (sum h Z + sum J ZZ), times `factor`.
ir::Generator ring(std::uint32_t bits, Complex factor) {
  ir::Generator made{"H", bits, {}, {}, true};
  made.sum.groups = {{0, {}}, {1, {}}};
  for (std::uint32_t q = 0; q < bits; ++q) {
    const std::uint64_t here = std::uint64_t{1} << q, next = std::uint64_t{1} << (q + 1) % bits;
    made.sum.groups[0].terms.push_back({-0.5 * factor, {here, 0}});
    made.sum.groups[1].terms.push_back({(0.1 + 0.01 * q) * factor, {0, here}});
    if (bits > 2 || q == 0) made.sum.groups[1].terms.push_back({-0.8 * factor, {0, here ^ next}});
  }
  return made;
}

/// -i [H, .] of a ring, dephasing and decay on each qubit.
ir::Generator open_ring(std::uint32_t qubits) {
  const ir::Generator h = ring(qubits, 1);
  ir::Generator made{"L", 2 * qubits, {}, {}, true};
  for (const auto& group : h.sum.groups) {
    made.sum.groups.push_back({group.coefficient, {}});
    for (const auto& term : group.terms) {
      made.sum.groups.back().terms.push_back({term.factor * Complex(0, -1), {term.word.x << qubits, term.word.z << qubits}});
      made.sum.groups.back().terms.push_back({term.factor * Complex(0, 1), term.word});
    }
  }
  made.sum.groups.push_back({2, {}});
  for (std::uint32_t q = 0; q < qubits; ++q) {
    const std::uint64_t row = std::uint64_t{1} << (qubits + q), column = std::uint64_t{1} << q;
    made.sum.groups.back().terms.push_back({0.5, {0, row | column}});
    made.sum.groups.back().terms.push_back({-0.5, {0, 0}});
    made.sum.groups.back().terms.push_back({0.25, {row | column, 0}});
    made.sum.groups.back().terms.push_back({-0.25, {row | column, row | column}});
  }
  return made;
}

Eigen::SparseMatrix<Complex, Eigen::RowMajor> sparse(const ir::Generator& generator, const double* coefficients) {
  std::vector<Eigen::Triplet<Complex>> entries;
  for (const auto& group : generator.sum.groups)
    for (const auto& term : group.terms) {
      const Complex phase = std::pow(Complex(0, 1), std::popcount(term.word.x & term.word.z));
      const Complex element = coefficients[group.coefficient] * term.factor * phase;
      for (std::uint64_t i = 0; i >> generator.bits == 0; ++i) {
        const bool odd = (std::popcount(term.word.z & i) & 1) != 0;
        entries.emplace_back(static_cast<int>(i ^ term.word.x), static_cast<int>(i), odd ? -element : element);
      }
    }
  const auto size = Eigen::Index{1} << generator.bits;
  Eigen::SparseMatrix<Complex, Eigen::RowMajor> matrix(size, size);
  matrix.setFromTriplets(entries.begin(), entries.end());
  return matrix;
}

__attribute__((noinline)) void stream(std::size_t amplitudes, double b, const double* d, const double* x, double* y) {
  for (std::size_t k = 0; k < amplitudes; ++k) {
    y[2 * k] = b * d[k] * x[2 * k];
    y[2 * k + 1] = b * d[k] * x[2 * k + 1];
  }
}

void h_psi() {
  std::printf("H psi of a ring, ns per amplitude (least of many)\n%4s %9s %9s %9s %10s %10s %9s\n", "n", "stream", "H", "-iH", "H/stream", "-iH/stream", "sparse/H");
  const double c[] = {0.7, 1.3, 0.2};
  for (const std::uint32_t n : {4u, 8u, 10u, 12u, 14u, 16u, 18u, 20u, 22u}) {
    ir::Module module = test::simple_coefficients(3);
    module.generators = {ring(n, 1), ring(n, {0, -1})};
    for (auto& generator : module.generators) generator.lanes = false;
    const runtime::Kernel kernel = kernel_of(module);
    const std::size_t amplitudes = std::size_t{1} << n;
    const Buffer x(2 * amplitudes), y(2 * amplitudes), d(kernel.prepared_doubles(0)), d2(kernel.prepared_doubles(1));
    kernel.prepare(0)(d.get());
    kernel.prepare(1)(d2.get());
    std::vector<std::function<void()>> bodies{[&] { stream(amplitudes, 1.3, d.get(), x.get(), y.get()); },
                                              [&, f = kernel.apply(0)] { f(c, d.get(), x.get(), y.get()); },
                                              [&, f = kernel.apply(1)] { f(c, d2.get(), x.get(), y.get()); }};
    Eigen::SparseMatrix<Complex, Eigen::RowMajor> matrix;
    if (n <= 20) {
      matrix = sparse(module.generators[0], c);
      bodies.push_back([&] {
        Eigen::Map<const Eigen::VectorXcd> in(reinterpret_cast<const Complex*>(x.get()), matrix.cols());
        Eigen::Map<Eigen::VectorXcd> out(reinterpret_cast<Complex*>(y.get()), matrix.rows());
        out.noalias() = matrix * in;
      });
    }
    const auto least = least_seconds(bodies, n <= 14 ? 60 : 15);
    const double unit = 1e9 / static_cast<double>(amplitudes);
    std::printf("%4u %9.3f %9.3f %9.3f %10.2f %10.2f %9.1f\n", n, least[0] * unit, least[1] * unit, least[2] * unit, least[1] / least[0],
                least[2] / least[0], n <= 20 ? least[3] / least[1] : 0.0);
  }
}

void liouvillians() {
  std::printf("\nLiouvillian of a ring with dephasing and decay, ns per amplitude\n%6s %9s %9s %9s\n", "qubits", "sparse", "compiled", "ratio");
  const double c[] = {0.7, 1.3, 0.2};
  for (const std::uint32_t n : {2u, 3u, 4u, 5u, 6u}) {
    ir::Module module = test::simple_coefficients(3);
    module.generators = {open_ring(n)};
    module.generators[0].lanes = false;
    const runtime::Kernel kernel = kernel_of(module);
    const std::size_t amplitudes = std::size_t{1} << 2 * n;
    const Buffer x(2 * amplitudes), y(2 * amplitudes), prepared(kernel.prepared_doubles(0));
    kernel.prepare(0)(prepared.get());
    const auto matrix = sparse(module.generators[0], c);
    const auto product = [&] {
      Eigen::Map<const Eigen::VectorXcd> in(reinterpret_cast<const Complex*>(x.get()), matrix.cols());
      Eigen::Map<Eigen::VectorXcd> out(reinterpret_cast<Complex*>(y.get()), matrix.rows());
      out.noalias() = matrix * in;
    };
    const auto least = least_seconds({product, [&] { kernel.apply(0)(c, prepared.get(), x.get(), y.get()); }}, 60);
    const double unit = 1e9 / static_cast<double>(amplitudes);
    std::printf("%6u %9.2f %9.2f %9.1f\n", n, least[0] * unit, least[1] * unit, least[0] / least[1]);
  }
}

/// Twelve stages as of a method of order 8, stage k from k + 1 vectors, against axpy by axpy.
void stages() {
  std::printf("\ntwelve stages, us\n%4s %9s %9s %9s\n", "n", "generic", "fused", "ratio");
  const double c[] = {0.7, 1.3, 0.2};
  for (const std::uint32_t n : {4u, 8u, 10u, 12u, 16u}) {
    ir::Module module = test::simple_coefficients(3);
    module.generators = {ring(n, {0, -1})};
    const runtime::Kernel kernel = kernel_of(module);
    const std::size_t doubles = std::size_t{2} << n;
    std::vector<Buffer> store;
    for (int k = 0; k < 15; ++k) store.emplace_back(doubles);
    const Buffer prepared(kernel.prepared_doubles(0));
    kernel.prepare(0)(prepared.get());
    std::vector<const double*> vectors;
    for (int k = 0; k < 13; ++k) vectors.push_back(store[static_cast<std::size_t>(k)].get());
    const std::vector<double> weights(13, 0.01);
    double *argument = store[13].get(), *y = store[14].get();
    const auto generic = [&] {
      for (std::size_t m = 1; m <= 12; ++m) {
        for (std::size_t i = 0; i < doubles; ++i) argument[i] = weights[0] * vectors[0][i];
        for (std::size_t j = 1; j < m; ++j)
          for (std::size_t i = 0; i < doubles; ++i) argument[i] += weights[j] * vectors[j][i];
        kernel.apply(0)(c, prepared.get(), argument, y);
      }
    };
    const auto fused = [&] {
      for (std::size_t m = 1; m <= 12; ++m) kernel.stage(0)(c, prepared.get(), m, weights.data(), vectors.data(), argument, y);
    };
    const auto least = least_seconds({generic, fused}, 40);
    std::printf("%4u %9.2f %9.2f %9.2f\n", n, least[0] * 1e6, least[1] * 1e6, least[0] / least[1]);
  }
}

void lanes() {
  std::printf("\nlanes, ns per point: a stage of 6 vectors, alone and with its coefficients\n%-14s %9s %9s %9s %9s %9s %9s\n", "generator",
              "one", "lanes", "ratio", "one", "lanes", "ratio");
  for (const bool open : {false, true})
    for (const std::uint32_t n : {1u, 2u, 3u, 4u}) {
      if (open && n > 3) continue;
      ir::Module module = test::simple_coefficients(3);
      module.generators = {open ? open_ring(n) : ring(n, {0, -1})};
      const runtime::Kernel kernel = kernel_of(module);
      const std::size_t width = kernel.lanes(), doubles = std::size_t{2} << kernel.bits(0);
      std::vector<Buffer> store;
      for (int k = 0; k < 8; ++k) store.emplace_back(doubles * width);
      const Buffer prepared(kernel.prepared_doubles(0) + 1), coefficients(kernel.rows(0) * width), weights(6 * width);
      kernel.prepare(0)(prepared.get());
      const double* vectors[6];
      for (std::size_t k = 0; k < 6; ++k) vectors[k] = store[k].get();
      const auto one = [&] {
        for (std::size_t l = 0; l < width; ++l)
          kernel.stage(0)(coefficients.get(), prepared.get(), 6, weights.get(), vectors, store[6].get(), store[7].get());
      };
      const auto all = [&] { kernel.lane_stage(0)(coefficients.get(), nullptr, 6, weights.get(), vectors, store[6].get(), store[7].get()); };
      const tarn_block block{nullptr, nullptr};
      const Buffer s(width), values(kernel.rows(0) * width);
      const auto one_whole = [&] {
        for (std::size_t l = 0; l < width; ++l) {
          kernel.values(0)(&block, 1, s.get() + l, nullptr, nullptr, values.get());
          kernel.stage(0)(values.get(), prepared.get(), 6, weights.get(), vectors, store[6].get(), store[7].get());
        }
      };
      const auto all_whole = [&] {
        kernel.values(0)(&block, width, s.get(), nullptr, nullptr, values.get());
        kernel.lane_stage(0)(values.get(), nullptr, 6, weights.get(), vectors, store[6].get(), store[7].get());
      };
      const auto least = least_seconds({one, all, one_whole, all_whole}, 60);
      const double unit = 1e9 / static_cast<double>(width);
      std::printf("%-12s%2u %9.1f %9.1f %9.2f %9.1f %9.1f %9.2f\n", open ? "Liouvillian" : "Hamiltonian", n, least[0] * unit, least[1] * unit,
                  least[0] / least[1], least[2] * unit, least[3] * unit, least[2] / least[3]);
    }
}

/// w exp(-|w|/10) / (1 + exp(-0.3 w)) + sin(w) cos(w/2), and single functions.
void expressions() {
  using namespace ir;
  Module module;
  const ValueId w = append(module, ReadArgument{Argument::w});
  const auto number = [&](double value) { return append(module, Constant{value}); };
  const auto join = [&](BinaryOp op, ValueId x, ValueId y) { return append(module, Binary{op, x, y}); };
  const auto take = [&](UnaryOp op, ValueId x) { return append(module, Unary{op, x}); };
  const ValueId decay = take(UnaryOp::exp, join(BinaryOp::div, take(UnaryOp::neg, take(UnaryOp::abs, w)), number(10)));
  const ValueId bose = join(BinaryOp::add, number(1), take(UnaryOp::exp, join(BinaryOp::mul, number(-0.3), w)));
  const ValueId wave = join(BinaryOp::mul, take(UnaryOp::sin, w), take(UnaryOp::cos, join(BinaryOp::mul, w, number(0.5))));
  const ValueId mix = join(BinaryOp::add, join(BinaryOp::div, join(BinaryOp::mul, w, decay), bose), wave);
  module.sets = {{"mix", {{"mix", mix}}, false, {}}, {"exp", {{"exp", take(UnaryOp::exp, w)}}, false, {}},
                 {"sin", {{"sin", take(UnaryOp::sin, w)}}, false, {}}, {"tanh", {{"tanh", take(UnaryOp::tanh, w)}}, false, {}},
                 {"pow", {{"pow", join(BinaryOp::pow, take(UnaryOp::abs, w), number(1.3))}}, false, {}}};
  const runtime::Kernel kernel = kernel_of(module);
  constexpr std::size_t kPoints = 4096;
  const Buffer in(kPoints), out(kPoints);
  for (std::size_t k = 0; k < kPoints; ++k) in.get()[k] = -20 + 40.0 * static_cast<double>(k) / kPoints;
  const std::vector<std::function<double(double)>> plain{
      [](double x) { return x * std::exp(-std::abs(x) / 10) / (1 + std::exp(-0.3 * x)) + std::sin(x) * std::cos(0.5 * x); },
      [](double x) { return std::exp(x); }, [](double x) { return std::sin(x); }, [](double x) { return std::tanh(x); },
      [](double x) { return std::pow(std::abs(x), 1.3); }};
  std::printf("\nexpressions over %zu points, ns per point\n%-6s %9s %9s %9s\n", kPoints, "", "libm", "compiled", "ratio");
  const tarn_block block{nullptr, nullptr};
  for (std::uint32_t set = 0; set < kernel.sets(); ++set) {
    const auto scalar = [&] {
      for (std::size_t k = 0; k < kPoints; ++k) out.get()[k] = plain[set](in.get()[k]);
    };
    const auto vector = [&] { kernel.values(set)(&block, kPoints, nullptr, nullptr, in.get(), out.get()); };
    const auto least = least_seconds({scalar, vector}, 60);
    std::printf("%-6s %9.2f %9.2f %9.2f\n", kernel.set_name(set), least[0] * 1e9 / kPoints, least[1] * 1e9 / kPoints, least[0] / least[1]);
  }
}

}  // namespace

int main(int count, char** arguments) {
  std::setvbuf(stdout, nullptr, _IOLBF, 0);
  const std::string only = count > 1 ? arguments[1] : "";
  if (only.empty() || only == "h_psi") h_psi();
  if (only.empty() || only == "liouvillians") liouvillians();
  if (only.empty() || only == "stages") stages();
  if (only.empty() || only == "lanes") lanes();
  if (only.empty() || only == "expressions") expressions();
}
