#include "runtime/integrate/chebyshev.h"

#include <Eigen/Eigenvalues>
#include <algorithm>
#include <cmath>
#include <complex>
#include <cstring>
#include <vector>

#include "runtime/integrate/packs.h"

namespace tarn::runtime {
namespace {

using Complex = std::complex<double>;

/// Longest phase h r of one expansion: longer ones gain little.
constexpr double kLongestPhase = 120;
/// How much longer than x a term may get; the truncation leaves room for it.
constexpr double kMostGrowth = 30;

/// J_0(z) .. J_m(z) with m such that the rest adds up to less than `tolerance`, by backward
/// recurrence and J_0 + 2 J_2 + 2 J_4 + ... = 1 (NIST DLMF 10.74(iv), 10.12.4).
std::vector<double> bessel_terms(double z, double tolerance) {
  const auto top = static_cast<std::size_t>(z + 30 + 12 * std::cbrt(z));
  std::vector<double> j(top + 2, 0.0);
  j[top] = 1e-250;
  for (std::size_t k = top; k-- > 0;) {
    j[k] = 2 * static_cast<double>(k + 1) / z * j[k + 1] - j[k + 2];
    if (std::abs(j[k]) > 1e200)
      for (double& value : j) value *= 1e-200;
  }
  double norm = j[0];
  for (std::size_t k = 2; k <= top; k += 2) norm += 2 * j[k];
  for (double& value : j) value /= norm;
  double rest = 0;
  std::size_t last = top;
  while (last > 1 && rest + 2 * std::abs(j[last]) < tolerance) rest += 2 * std::abs(j[last--]);
  j.resize(last + 1);
  return j;
}

/// before = factor (product + i centre now) + before, sum += weight before.
TARN_HOST_CLONES
void next_term(std::size_t length, double factor, double centre, double weight, const double* product,
               const double* now, double* before, double* sum) {
  using Index = long long __attribute__((vector_size(kPackWidth * sizeof(long long))));
  const Index swapped = {1, 0, 3, 2, 5, 4, 7, 6};
  const double c = factor * centre;
  const Pack turn = {-c, c, -c, c, -c, c, -c, c};
  for (std::size_t i = 0; i < length; i += kPackWidth) {
    const Pack term = factor * pack(product + i) +
                      turn * __builtin_shuffle(pack(now + i), swapped) + pack(before + i);
    pack(before + i) = term;
    pack(sum + i) += weight * term;
  }
}

double norm(const AlignedArray& x) {
  double result = 0;
  squares(x.size(), 1, x.data(), &result);
  return std::sqrt(result);
}

}  // namespace

Interval estimate_spectrum(const Product& g, std::size_t size, std::size_t steps, Counters& counters) {
  using Vector = Eigen::Map<Eigen::VectorXcd, Eigen::Aligned64>;
  const auto amplitudes = static_cast<Eigen::Index>(size / 2);
  AlignedArray memory[3] = {AlignedArray(size), AlignedArray(size), AlignedArray(size)};
  const auto view = [&](AlignedArray& a) { return Vector(reinterpret_cast<Complex*>(a.data()), amplitudes); };
  steps = std::min(steps, size / 2);
  // A start without structure, the same every time.
  std::uint64_t seed = 0x9E3779B97F4A7C15u;
  for (std::size_t i = 0; i < size; ++i) {
    seed = seed * 6364136223846793005u + 1442695040888963407u;
    memory[0].data()[i] = static_cast<double>(seed >> 11) * 0x1p-53 - 0.5;
  }
  view(memory[0]).normalize();
  Eigen::VectorXd diagonal(static_cast<Eigen::Index>(steps)), beside(static_cast<Eigen::Index>(steps));
  Eigen::Index done = 0;
  for (; done < diagonal.size(); ++done) {
    Vector v = view(memory[0]), before = view(memory[1]), w = view(memory[2]);
    g(memory[0].data(), memory[2].data());
    ++counters.evaluations;
    w *= Complex(0, 1);
    diagonal[done] = v.dot(w).real();
    w -= diagonal[done] * v;
    if (done > 0) w -= beside[done - 1] * before;
    beside[done] = w.norm();
    if (!(beside[done] > 1e-12 * (std::abs(diagonal[done]) + 1e-300))) {
      ++done;
      break;
    }
    before = w / beside[done];
    std::swap(memory[0], memory[1]);
  }
  Eigen::SelfAdjointEigenSolver<Eigen::MatrixXd> solver;
  solver.computeFromTridiagonal(diagonal.head(done), beside.head(std::max<Eigen::Index>(done - 1, 0)),
                                Eigen::ComputeEigenvectors);
  const auto residual = [&](Eigen::Index k) {
    return std::abs(beside[done - 1] * solver.eigenvectors()(done - 1, k));
  };
  const double low = solver.eigenvalues()[0] - residual(0);
  const double high = solver.eigenvalues()[done - 1] + residual(done - 1);
  return {(low + high) / 2, 0.51 * (high - low)};
}

ChebyshevExponential::ChebyshevExponential(std::size_t size)
    : size_(size), before_(size), now_(size), product_(size), sum_(size) {}

std::optional<Failure> ChebyshevExponential::advance(const Product& g, double h, double tolerance,
                                                     Interval& interval, double* x, Counters& counters,
                                                     const Interrupted& interrupted) {
  double done = 0, longest = h;
  while (done < h) {
    if (interval.radius > 0) longest = std::min(longest, kLongestPhase / interval.radius);
    const double pieces = std::ceil((h - done) / longest * (1 - 1e-12));
    const double step = pieces <= 1 ? h - done : (h - done) / pieces;
    switch (attempt(g, step, tolerance * std::max(step / h, 1e-3), interval, x, counters, interrupted)) {
      case Outcome::interrupted: return Failure{FailureKind::interrupted, done};
      case Outcome::not_finite: return Failure{FailureKind::not_finite, done};
      case Outcome::grew:
        ++counters.rejected;
        interval.radius = 1.25 * interval.radius + 1e-12 / h;
        longest = 0.7 * step;
        continue;
      case Outcome::done: break;
    }
    const Complex phase = std::polar(1.0, -step * interval.centre);
    auto* amplitudes = reinterpret_cast<Complex*>(x);
    const auto* sums = reinterpret_cast<const Complex*>(sum_.data());
    for (std::size_t i = 0; i < size_ / 2; ++i) amplitudes[i] = phase * sums[i];
    ++counters.exponentials;
    done = pieces <= 1 ? h : done + step;
  }
  return {};
}

/// Leaves exp(i step centre) exp(step G) x in sum_.
ChebyshevExponential::Outcome ChebyshevExponential::attempt(const Product& g, double h, double tolerance,
                                                            const Interval& interval, const double* x,
                                                            Counters& counters,
                                                            const Interrupted& interrupted) {
  const double radius = std::max(interval.radius, 1e-6 / h);
  const std::vector<double> j = bessel_terms(h * radius, std::max(tolerance, 1e-17) / kMostGrowth);
  std::memset(before_.data(), 0, before_.size() * sizeof(double));
  std::memcpy(now_.data(), x, size_ * sizeof(double));
  for (std::size_t i = 0; i < size_; ++i) sum_.data()[i] = j[0] * x[i];
  const double start = norm(now_);
  if (!std::isfinite(start)) return Outcome::not_finite;
  for (std::size_t k = 1; k < j.size(); ++k) {
    if (interrupted && interrupted()) return Outcome::interrupted;
    g(now_.data(), product_.data());
    ++counters.evaluations;
    next_term(now_.size(), (k == 1 ? 1 : 2) / radius, interval.centre, 2 * j[k], product_.data(),
              now_.data(), before_.data(), sum_.data());
    std::swap(before_, now_);
    // Growth is exponential in k: looking now and then is enough.
    if ((k % 16 == 0 || k + 1 == j.size()) && !(norm(now_) <= kMostGrowth * start)) return Outcome::grew;
  }
  return Outcome::done;
}

}  // namespace tarn::runtime
