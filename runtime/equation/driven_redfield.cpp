#include "runtime/equation/driven_redfield.h"

#include <Eigen/Eigenvalues>
#include <array>

#include "lang/support/check.h"
#include "runtime/equation/integrate_along.h"

namespace tarn::runtime {
namespace {

using Complex = std::complex<double>;

using Square = Eigen::MatrixXcd;

/// Matrices of one s and t.
struct DrivenNode {
  Square turn;   ///< -i H.
  Square decay;  ///< -i H - sum L^dagger L / 2.
  std::vector<Square> couplings;
};

/// rho and the X_k, one after the other, column by column as complex numbers.
class DrivenEquation {
 public:
  using Map = Eigen::Map<Square>;
  using ConstMap = Eigen::Map<const Square>;

  explicit DrivenEquation(const OpenSystem& system)
      : system_(system), dimension_(system.dimension), matrix_(system.dimension, system.dimension) {
    TARN_CHECK(system.couplings.size() == system.baths.size());
    for (std::size_t c = 0; c < system.baths.size(); ++c)
      for (const Exponential& term : system.baths[c].terms)
        if (term.coefficient != 0.0) terms_.push_back({c, term});
    for (const Eigen::MatrixXcd& jump : system.jumps) jumps_.push_back(jump);
    lam_.assign(system.couplings.size(), zero());
    x_ = y_ = zero();
  }

  std::size_t size() const { return 2 * block() * (1 + terms_.size()); }

  bool prepare(std::size_t node, double s, double t) {
    if (node >= nodes_.size()) nodes_.resize(node + 1);
    DrivenNode& at = nodes_[node];
    system_.hamiltonian(s, t, matrix_);
    bool finite = matrix_.allFinite();
    at.turn = at.decay = Complex(0, -1) * matrix_;
    for (const Square& jump : jumps_) at.decay -= jump.adjoint() * jump / 2;
    const bool fresh = at.couplings.empty();
    if (fresh) at.couplings.assign(system_.couplings.size(), zero());
    for (std::size_t c = 0; c < at.couplings.size(); ++c) {
      if (system_.couplings[c].constant && !fresh) continue;
      system_.couplings[c].at(s, matrix_);
      finite = finite && matrix_.allFinite();
      at.couplings[c] = matrix_;
    }
    return finite;
  }

  void derivative(std::size_t node, const double* from, double* to) {
    const DrivenNode& at = nodes_[node];
    for (std::size_t c = 0; c < lam_.size(); ++c) lam_[c] = system_.baths[c].rest * at.couplings[c];
    for (std::size_t k = 0; k < terms_.size(); ++k) {
      const ConstMap x = part(from, k + 1);
      Map dx = part(to, k + 1);
      const auto& [coupling, term] = terms_[k];
      dx.noalias() = at.turn * x;
      dx.noalias() -= x * at.turn;
      dx += at.couplings[coupling] - term.rate * x;
      lam_[coupling] += term.coefficient * x;
    }
    const ConstMap rho = part(from, 0);
    Map d = part(to, 0);
    d.noalias() = at.decay * rho;
    d.noalias() += rho * at.decay.adjoint();
    for (std::size_t c = 0; c < lam_.size(); ++c) {
      x_.noalias() = lam_[c] * rho;
      x_.noalias() -= rho * lam_[c].adjoint();
      d.noalias() -= at.couplings[c] * x_;
      d.noalias() += x_ * at.couplings[c];
    }
    for (const Square& jump : jumps_) {
      y_.noalias() = jump * rho;
      d.noalias() += y_ * jump.adjoint();
    }
  }

  std::vector<double> start(const Density& initial, StartingMemory memory, double s) {
    std::vector<double> y(size(), 0.0);
    part(y.data(), 0) = initial;
    if (memory == StartingMemory::none) return y;
    prepare(0, s, 0);
    const Eigen::MatrixXcd h = Complex(0, 1) * nodes_[0].turn;
    const Eigen::SelfAdjointEigenSolver<Eigen::MatrixXcd> levels(h);
    const Eigen::MatrixXcd& v = levels.eigenvectors();
    for (std::size_t k = 0; k < terms_.size(); ++k) {
      Eigen::MatrixXcd a = v.adjoint() * nodes_[0].couplings[terms_[k].coupling] * v;
      for (Eigen::Index n = 0; n < dimension_; ++n)
        for (Eigen::Index m = 0; m < dimension_; ++m)
          a(n, m) /= terms_[k].term.rate + Complex(0, levels.eigenvalues()[n] - levels.eigenvalues()[m]);
      part(y.data(), k + 1) = v * a * v.adjoint();
    }
    return y;
  }

  Density state(const double* y) const { return part(y, 0); }

 private:
  struct Term {
    std::size_t coupling;
    Exponential term;
  };
  Square zero() const { return Square::Zero(dimension_, dimension_); }
  std::size_t block() const { return static_cast<std::size_t>(dimension_ * dimension_); }
  ConstMap part(const double* y, std::size_t k) const {
    return ConstMap(reinterpret_cast<const Complex*>(y) + k * block(), dimension_, dimension_);
  }
  Map part(double* y, std::size_t k) const {
    return Map(reinterpret_cast<Complex*>(y) + k * block(), dimension_, dimension_);
  }

  const OpenSystem& system_;
  Eigen::Index dimension_;
  std::vector<Term> terms_;
  std::vector<Square> jumps_, lam_;
  std::vector<DrivenNode> nodes_;
  Eigen::MatrixXcd matrix_;
  Square x_, y_;
};

}  // namespace

double driven_redfield_bytes(const OpenSystem& system) {
  constexpr double kVectors = 21, kNodes = 16;
  double matrices = 1;
  for (const ExponentialSum& bath : system.baths) matrices += static_cast<double>(bath.terms.size());
  const double block = 16.0 * static_cast<double>(system.dimension * system.dimension);
  return block * (kVectors * matrices + kNodes * static_cast<double>(2 + system.couplings.size()));
}

Result<Counters, RunError> propagate_driven_redfield(const OpenSystem& system, const MemoryRun& run, const Density& initial,
                                                     StartingMemory memory, const Visit& visit,
                                                     const Interrupted& interrupted) {
  DrivenEquation driven(system);
  const SteppedEquation equation{[&](std::size_t node, double s, double t) { return driven.prepare(node, s, t); },
                                 [&](std::size_t node, const double* x, double* d) { driven.derivative(node, x, d); }};
  State state = Density(system.dimension, system.dimension);
  const OnState on_state = [&](std::size_t index, const double* y) {
    std::get<Density>(state) = driven.state(y);
    visit(index, state);
  };
  const Timeline& timeline = *run.timeline;
  const double s = timeline.segments.empty() ? timeline.first_s : timeline.segments.front().s0;
  Counters counters;
  const auto failure =
      integrate_along(equation, run, system.reads_t, driven.start(initial, memory, s), on_state, interrupted, counters);
  if (failure) return Unexpected{run_error(*failure)};
  return counters;
}

}  // namespace tarn::runtime
