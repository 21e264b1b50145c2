#include "tests/physics/closed/model.h"

#include <catch2/catch.hpp>
#include <unsupported/Eigen/KroneckerProduct>

#include "runtime/equation/lindblad.h"
#include "runtime/equation/schroedinger.h"

namespace tarn::test {
namespace {

// The pointers of the interface carry the model itself.
const Model& model_of(const double* p) { return *reinterpret_cast<const Model*>(p); }

tarn_status values_of(const Model& model, std::size_t lanes, std::size_t count, const double* s,
                      const double* t, double* out) {
  std::vector<double> rows(model.parts.size());
  for (std::size_t p = 0; p < count; ++p) {
    model.coefficients(p % lanes, s[p], t[p], rows.data());
    for (std::size_t row = 0; row < rows.size(); ++row) out[row * count + p] = rows[row];
  }
  return TARN_OK;
}

tarn_status values(const tarn_block* block, std::size_t count, const double* s, const double* t,
                   const double*, double* out) {
  return values_of(model_of(block->inputs), 1, count, s, t, out);
}

tarn_status lane_values(const tarn_block* block, std::size_t count, const double* s, const double* t,
                        const double*, double* out) {
  const Model& model = model_of(block->inputs);
  return values_of(model, model.lanes, count, s, t, out);
}

void apply_width(const Model& model, std::size_t width, const double* c, const double* x, double* y) {
  const auto n = static_cast<Eigen::Index>(1) << model.bits;
  std::fill_n(y, 2 * static_cast<std::size_t>(n) * width, 0.0);
  for (std::size_t part = 0; part < model.parts.size(); ++part)
    for (Eigen::Index row = 0; row < n; ++row)
      for (Sparse::InnerIterator it(model.parts[part], row); it; ++it)
        for (std::size_t l = 0; l < width; ++l) {
          const auto from = 2 * static_cast<std::size_t>(it.col()) * width + l;
          const auto to = 2 * static_cast<std::size_t>(row) * width + l;
          const double a = c[part * width + l] * it.value().real(), b = c[part * width + l] * it.value().imag();
          y[to] += a * x[from] - b * x[from + width];
          y[to + width] += a * x[from + width] + b * x[from];
        }
}

void combine_width(const Model& model, std::size_t width, std::size_t count, const double* weights,
                   const double* const* vectors, double* argument) {
  const std::size_t length = 2 * (std::size_t{1} << model.bits) * width;
  for (std::size_t i = 0; i < length; ++i) {
    double sum = 0;
    for (std::size_t j = 0; j < count; ++j) sum += weights[j * width + i % width] * vectors[j][i];
    argument[i] = sum;
  }
}

tarn_status apply(const double* c, const double* prepared, const double* x, double* y) {
  apply_width(model_of(prepared), 1, c, x, y);
  return TARN_OK;
}
tarn_status stage(const double* c, const double* prepared, std::size_t count, const double* weights,
                  const double* const* vectors, double* argument, double* y) {
  combine_width(model_of(prepared), 1, count, weights, vectors, argument);
  return apply(c, prepared, argument, y);
}
tarn_status lane_apply(const double* c, const double* prepared, const double* x, double* y) {
  apply_width(model_of(prepared), model_of(prepared).lanes, c, x, y);
  return TARN_OK;
}
tarn_status lane_stage(const double* c, const double* prepared, std::size_t count, const double* weights,
                       const double* const* vectors, double* argument, double* y) {
  combine_width(model_of(prepared), model_of(prepared).lanes, count, weights, vectors, argument);
  return lane_apply(c, prepared, argument, y);
}

}  // namespace

tarn_block Model::block() const { return {reinterpret_cast<const double*>(this), nullptr}; }

runtime::Entries Model::entries() const {
  return {values, stage, apply, reinterpret_cast<const double*>(this),
          static_cast<std::uint32_t>(parts.size()), bits, 1, reads_t};
}

runtime::Entries Model::lane_entries() const {
  return {lane_values, lane_stage, lane_apply, reinterpret_cast<const double*>(this),
          static_cast<std::uint32_t>(parts.size()), bits, lanes, reads_t};
}

Dense Model::generator(std::size_t lane, double s, double t) const {
  std::vector<double> rows(parts.size());
  coefficients(lane, s, t, rows.data());
  Dense sum = Dense::Zero(parts.front().rows(), parts.front().cols());
  for (std::size_t part = 0; part < parts.size(); ++part) sum += rows[part] * Dense(parts[part]);
  return sum;
}

Sparse on(char p, std::size_t qubit, std::size_t n) {
  Dense one(2, 2);
  switch (p) {
    case 'x': one << 0, 1, 1, 0; break;
    case 'y': one << 0, -kI, kI, 0; break;
    case 'z': one << 1, 0, 0, -1; break;
    case 'm': one << 0, 1, 0, 0; break;
    case 'p': one << 0, 0, 1, 0; break;
    default: one.setIdentity();
  }
  const auto identity = [](std::size_t qubits) {
    const auto size = Eigen::Index{1} << qubits;
    Sparse result(size, size);
    result.setIdentity();
    return result;
  };
  const Sparse small = one.sparseView();
  const Sparse left = Eigen::kroneckerProduct(identity(qubit), small);
  return Eigen::kroneckerProduct(left, identity(n - 1 - qubit));
}

Sparse closed(const Sparse& h) { return -kI * h; }

Sparse commutator(const Sparse& h) {
  Sparse one(h.rows(), h.cols());
  one.setIdentity();
  const Sparse left = Eigen::kroneckerProduct(h, one), right = Eigen::kroneckerProduct(one, Sparse(h.transpose()));
  return -kI * (left - right);
}

Sparse dissipator(const Sparse& l) {
  Sparse one(l.rows(), l.cols());
  one.setIdentity();
  const Sparse square = l.adjoint() * l;
  const Sparse jump = Eigen::kroneckerProduct(l, Sparse(l.conjugate()));
  const Sparse left = Eigen::kroneckerProduct(square, one),
               right = Eigen::kroneckerProduct(one, Sparse(square.transpose()));
  return jump - 0.5 * (left + right);
}

Trace run_closed(const Model& model, const runtime::Timeline& timeline, const Eigen::VectorXcd& initial,
                 double tolerance, std::vector<double> times, std::vector<double> breaks) {
  Trace trace;
  const runtime::LinearRun run{&timeline, breaks, times, tolerance};
  const auto visit = [&](std::size_t index, const runtime::State& state) {
    REQUIRE(index == trace.states.size());
    trace.states.push_back(std::get<runtime::Ket>(state));
  };
  const auto result = propagate_schroedinger(model.entries(), model.block(), run, initial, visit, {});
  REQUIRE(result.has_value());
  REQUIRE(trace.states.size() == times.size());
  trace.counters = *result;
  return trace;
}

Trace run_lindblad(const Model& model, const runtime::Timeline& timeline, const Dense& initial,
                   double tolerance, std::vector<double> times, std::vector<double> breaks) {
  Trace trace;
  const runtime::LinearRun run{&timeline, breaks, times, tolerance};
  const auto visit = [&](std::size_t index, const runtime::State& state) {
    REQUIRE(index == trace.states.size());
    const Eigen::MatrixXcd rows = std::get<runtime::Density>(state).transpose();
    trace.states.push_back(Eigen::Map<const Eigen::VectorXcd>(rows.data(), rows.size()));
  };
  const auto result = propagate_lindblad(model.entries(), model.block(), run, initial, visit, {});
  REQUIRE(result.has_value());
  REQUIRE(trace.states.size() == times.size());
  trace.counters = *result;
  return trace;
}

runtime::Timeline ramp(double duration) { return {{{0, duration, 0, 1}}, 0, 1}; }

}  // namespace tarn::test
