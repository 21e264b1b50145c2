#include "lang/support/check.h"
#include "runtime/trajectories/lab_part.h"
#include "runtime/trajectories/unravelling.h"

namespace tarn::runtime {
namespace {

using Complex = std::complex<double>;
using Index = Eigen::Index;

struct FastNoise {
  std::shared_ptr<const NoiseTable> table;
  LabOperators lab;

  bool drift(double s, double t, Eigen::MatrixXcd& out) const {
    const auto coefficients = lab_coefficients(lab, s, t);
    if (!coefficients) return false;
    const NoiseLayout& layout = table->layout();
    out.resize(layout.dimension, layout.dimension);
    table->drift_at(s, t, reinterpret_cast<double*>(out.data()));
    add_lab_drift(lab, *coefficients, out);
    return true;
  }

  void jumps(double s, double t, const Ket& psi, JumpImages& out) const {
    const NoiseLayout& layout = table->layout();
    const Index n = layout.dimension;
    const auto terms = static_cast<Index>(layout.terms), own = static_cast<Index>(lab.jumps.size());
    std::vector<double> noise(layout.size());
    table->at(s, t, noise.data());
    out.basis.resize(0, 0);
    out.images.resize(n, terms + own);
    // left_j = L_j / sqrt(2).
    const Ket doubled = std::sqrt(2.0) * psi;
    for (Index j = 0; j < terms; ++j) {
      const double* left = noise.data() + layout.left() + static_cast<std::size_t>(j) * layout.square() * (layout.real_left ? 1 : 2);
      if (layout.real_left) {
        const Eigen::Map<const Eigen::MatrixXd> op(left, n, n);
        out.images.col(j).real() = op * doubled.real();
        out.images.col(j).imag() = op * doubled.imag();
      } else {
        out.images.col(j) = Eigen::Map<const Eigen::MatrixXcd>(reinterpret_cast<const Complex*>(left), n, n) * doubled;
      }
    }
    const auto coefficients = lab_coefficients(lab, s, t);
    TARN_CHECK(coefficients.has_value());
    for (Index j = 0; j < own; ++j)
      out.images.col(terms + j) = lab_matrix(lab.jumps[static_cast<std::size_t>(j)], *coefficients, n) * psi;
  }
};

}  // namespace

Unravelling unravel_fast_noise(std::shared_ptr<const NoiseTable> table, LabOperators lab, bool reads_t) {
  TARN_CHECK(!table->layout().split && !table->layout().own_right);
  const bool along_time = table->along_time();
  const Index dimension = table->layout().dimension;
  const auto noise = std::make_shared<const FastNoise>(FastNoise{std::move(table), std::move(lab)});
  Unravelling made;
  made.dimension = dimension;
  made.reads_t = reads_t || along_time;
  made.drift = [noise](double s, double t, Eigen::MatrixXcd& out) { return noise->drift(s, t, out); };
  made.jumps = [noise](double s, double t, const Ket& psi, JumpImages& out) { noise->jumps(s, t, psi, out); };
  return made;
}

}  // namespace tarn::runtime
