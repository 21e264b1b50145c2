#include "brute.h"

#include <algorithm>

#include "tests/support/dense.h"

namespace tarn::runtime::testing {
namespace {

using test::product_of;

/// a b + b a.
Density anticommutator(const Density& a, const Density& b) { return product_of(a, b) + product_of(b, a); }

/// L rho L^dagger - {L^dagger L, rho}/2
Density dissipator(const Density& l, const Density& square, const Density& rho) {
  return product_of(product_of(l, rho), l.adjoint()) - 0.5 * anticommutator(square, rho);
}

double value(const SpectralFunction& function, double w) {
  double out = 0;
  if (function) function({&w, 1}, &out);
  return out;
}

}  // namespace

Density Brute::at(const OperatorSum& sum, const HamiltonianFamily& family, double s) {
  std::vector<double> row(family.rows);
  family.coefficients({&s, 1}, row.data());
  const Eigen::Index size = Eigen::Index{1} << family.qubits;
  Density total = Density::Zero(size, size);
  for (const auto& group : sum.groups) total += row[group.coefficient] * dense_matrix<std::complex<double>>(group.terms, family.qubits);
  return total;
}

Density Brute::operator()(double s, double t, const Density& rho) const {
  const std::complex<double> i(0, 1);
  Density h = at(family.hamiltonian, family, s);
  const auto [e, v] = test::dense_levels_of(h);
  Density out = Density::Zero(rho.rows(), rho.cols());
  if (drive) h += drive(t);
  std::vector<double> frequencies;
  for (Eigen::Index n = 0; n < e.size(); ++n)
    for (Eigen::Index m = 0; m < e.size(); ++m) frequencies.push_back(e[m] - e[n]);
  std::sort(frequencies.begin(), frequencies.end());
  for (std::size_t c = 0; c < family.couplings.size(); ++c) {
    const Density a = product_of(product_of(v.adjoint(), at(family.couplings[c], family, s)), v);
    for (std::size_t k = 0, last = 0; k < frequencies.size(); k = last) {
      double mean = 0;
      for (last = k; last < frequencies.size() && (last == k || frequencies[last] - frequencies[last - 1] <= tolerance); ++last)
        mean += frequencies[last];
      mean /= static_cast<double>(last - k);
      Density jump = Density::Zero(a.rows(), a.cols());
      for (Eigen::Index n = 0; n < e.size(); ++n)
        for (Eigen::Index m = 0; m < e.size(); ++m)
          if (e[m] - e[n] >= frequencies[k] && e[m] - e[n] <= frequencies[last - 1]) jump(n, m) = a(n, m);
      jump = product_of(product_of(v, jump), v.adjoint());
      const Density square = product_of(jump.adjoint(), jump);
      out += value(baths[c].rate, mean) * dissipator(jump, square, rho);
      h += value(baths[c].shift, mean) * square;
    }
  }
  for (const LabJump& jump : jumps) {
    const Density square = product_of(jump.op.adjoint(), jump.op);
    out += jump.rate * dissipator(jump.op, square, rho);
  }
  return out - i * (product_of(h, rho) - product_of(rho, h));
}

Density Brute::run(const Segment& segment, const Density& rho, int steps) const {
  return (16.0 * fixed(segment, rho, 2 * steps) - fixed(segment, rho, steps)) / 15.0;
}

Density Brute::fixed(const Segment& segment, Density rho, int steps) const {
  const double h = (segment.t1 - segment.t0) / steps;
  // Where levels meet at an end of a ramp, more frequencies coincide there than anywhere inside:
  // a single moment, which must not weigh as much as a stage of the integrator.
  const auto slope = [&](double time, const Density& state) {
    const double t = std::clamp(time, segment.t0 + 0.01 * h, segment.t1 - 0.01 * h);
    return (*this)(segment.s0 + (segment.s1 - segment.s0) * (t - segment.t0) / (segment.t1 - segment.t0), t, state);
  };
  for (int k = 0; k < steps; ++k) {
    const double t = segment.t0 + k * h;
    const Density k1 = slope(t, rho), k2 = slope(t + h / 2, rho + h / 2 * k1);
    const Density k3 = slope(t + h / 2, rho + h / 2 * k2), k4 = slope(t + h, rho + h * k3);
    rho += h / 6 * (k1 + 2 * k2 + 2 * k3 + k4);
  }
  return rho;
}

}  // namespace tarn::runtime::testing
