#include "lang/support/check.h"
#include "runtime/levels/product.h"
#include "runtime/levels/track.h"
#include "runtime/trajectories/lab_part.h"
#include "runtime/trajectories/unravelling.h"

namespace tarn::runtime {
// Named, because the functions handed out hold them: GCC warns of that where sources are joined.

using Complex = std::complex<double>;
using Index = Eigen::Index;

/// Pairs (n, m) that one jump joins, and how often it comes.
struct LevelJumpGroup {
  std::size_t coupling;
  std::vector<std::uint32_t> pairs;  ///< n + K m.
  double rate, shift;
};

/// The jumps of one instant, in its levels.
template <class Scalar>
struct LevelInstant {
  Frame<Scalar> frame;
  std::vector<Matrix<Scalar>> elements;  ///< Of each coupling.
  std::vector<LevelJumpGroup> groups;
};

template <class Scalar>
struct DaviesUnravelling {
  LevelModel<Scalar> model;
  std::vector<BathFunctions> baths;
  double tolerance;
  Index levels;
  LabOperators lab = {};
  std::shared_ptr<const SmoothTable> table = {};

  LevelInstant<Scalar> at(double s) const {
    LevelInstant<Scalar> now;
    now.frame = model.solve(s, levels);
    const FrequencyGroups frequencies = frequency_groups(now.frame.energies, tolerance);
    std::vector<double> w(frequencies.count(), 0.0), rates(w.size()), shifts(w.size(), 0.0);
    const auto pairs_of = [&](std::size_t g) {
      return std::span(frequencies.order).subspan(frequencies.start[g], frequencies.start[g + 1] - frequencies.start[g]);
    };
    for (std::size_t g = 0; g < w.size(); ++g) {
      for (const std::uint32_t pair : pairs_of(g)) w[g] += now.frame.energies[pair / levels] - now.frame.energies[pair % levels];
      w[g] /= static_cast<double>(pairs_of(g).size());
    }
    for (std::size_t c = 0; c < baths.size(); ++c) {
      const Matrix<Scalar>& elements = now.elements.emplace_back(coupling_elements(model, c, now.frame));
      const double negligible = 1e-13 * elements.cwiseAbs().maxCoeff();
      baths[c].rate(w, rates.data());
      if (baths[c].shift) baths[c].shift(w, shifts.data());
      for (std::size_t g = 0; g < w.size(); ++g) {
        LevelJumpGroup group{c, {}, rates[g], baths[c].shift ? shifts[g] : 0.0};
        for (const std::uint32_t pair : pairs_of(g))
          if (std::abs(elements.data()[pair]) > negligible) group.pairs.push_back(pair);
        if (!group.pairs.empty()) now.groups.push_back(std::move(group));
      }
    }
    return now;
  }

  bool drift(double s, double t, Eigen::MatrixXcd& out) const {
    const auto coefficients = lab_coefficients(lab, s, t);
    if (!coefficients) return false;
    out.resize(model.dimension, model.dimension);
    if (table) table->at(s, reinterpret_cast<double*>(out.data()));
    else out = bath_drift(s);
    add_lab_drift(lab, *coefficients, out);
    return out.allFinite();
  }

  Eigen::MatrixXcd bath_drift(double s) const {
    const LevelInstant<Scalar> now = at(s);
    // sum A_w^dagger A_w (gamma/2 + i S).
    Eigen::MatrixXcd loss = Eigen::MatrixXcd::Zero(levels, levels);
    for (const LevelJumpGroup& group : now.groups) {
      const Scalar* a = now.elements[group.coupling].data();
      const Complex weight(0.5 * group.rate, group.shift);
      for (const std::uint32_t p : group.pairs)
        for (const std::uint32_t q : group.pairs)
          if (p % levels == q % levels) loss(p / levels, q / levels) += weight * std::conj(Complex(a[p])) * Complex(a[q]);
    }
    const Eigen::MatrixXcd v = now.frame.vectors.template cast<Complex>();
    return -product<Complex>(product<Complex>(v, loss), v.adjoint());
  }

  void jumps(double s, double t, const Ket& psi, JumpImages& out) const {
    const LevelInstant<Scalar> now = at(s);
    const auto coefficients = lab_coefficients(lab, s, t);
    TARN_CHECK(coefficients.has_value());
    const auto groups = static_cast<Index>(now.groups.size()), own = static_cast<Index>(lab.jumps.size());
    const Eigen::MatrixXcd v = now.frame.vectors.template cast<Complex>();
    const Ket inside = v.adjoint() * psi;
    // Jumps as written leave the levels kept.
    const bool stays = own == 0;
    Eigen::MatrixXcd images = Eigen::MatrixXcd::Zero(levels, groups);
    for (Index g = 0; g < groups; ++g) {
      const LevelJumpGroup& group = now.groups[static_cast<std::size_t>(g)];
      const Scalar* a = now.elements[group.coupling].data();
      for (const std::uint32_t pair : group.pairs)
        images(pair % levels, g) += std::sqrt(group.rate) * Complex(a[pair]) * inside[pair / levels];
    }
    if (stays) {
      out.images = std::move(images);
      out.basis = v;
      return;
    }
    out.basis.resize(0, 0);
    out.images.resize(psi.size(), groups + own);
    out.images.leftCols(groups) = product<Complex>(v, images);
    for (Index j = 0; j < own; ++j)
      out.images.col(groups + j) = lab_matrix(lab.jumps[static_cast<std::size_t>(j)], *coefficients, psi.size()) * psi;
  }
};

template <class Scalar>
Unravelling unravel_davies(LevelModel<Scalar> model, std::vector<BathFunctions> baths, double tolerance, Index levels,
                           LabOperators lab, bool reads_t, std::shared_ptr<const SmoothTable> table) {
  TARN_CHECK(baths.size() == model.couplings);
  const Index dimension = model.dimension, kept = levels > 0 ? std::min(levels, dimension) : dimension;
  const auto davies = std::make_shared<const DaviesUnravelling<Scalar>>(DaviesUnravelling<Scalar>{std::move(model), std::move(baths), tolerance, kept, std::move(lab), std::move(table)});
  Unravelling made;
  made.dimension = dimension;
  made.reads_t = reads_t;
  made.drift = [davies](double s, double t, Eigen::MatrixXcd& out) { return davies->drift(s, t, out); };
  made.jumps = [davies](double s, double t, const Ket& psi, JumpImages& out) { davies->jumps(s, t, psi, out); };
  return made;
}

template <class Scalar>
std::shared_ptr<const SmoothTable> davies_drift(const LevelModel<Scalar>& model, const std::vector<BathFunctions>& baths, double tolerance,
                                                Index levels, const SmoothTable::Options& options) {
  const Index dimension = model.dimension;
  const DaviesUnravelling<Scalar> davies{model, baths, tolerance, levels > 0 ? std::min(levels, dimension) : dimension};
  SmoothTable::Options sized = options;
  sized.size = static_cast<std::size_t>(2 * dimension * dimension);
  const auto made = SmoothTable::make([&](double s, double* out) {
    Eigen::Map<Eigen::MatrixXcd>(reinterpret_cast<Complex*>(out), dimension, dimension) = davies.bath_drift(s);
  }, sized);
  return made ? std::make_shared<const SmoothTable>(*made) : nullptr;
}

template Unravelling unravel_davies<double>(LevelModel<double>, std::vector<BathFunctions>, double, Index, LabOperators, bool, std::shared_ptr<const SmoothTable>);
template Unravelling unravel_davies<Complex>(LevelModel<Complex>, std::vector<BathFunctions>, double, Index, LabOperators, bool, std::shared_ptr<const SmoothTable>);
template std::shared_ptr<const SmoothTable> davies_drift<double>(const LevelModel<double>&, const std::vector<BathFunctions>&, double, Index, const SmoothTable::Options&);
template std::shared_ptr<const SmoothTable> davies_drift<Complex>(const LevelModel<Complex>&, const std::vector<BathFunctions>&, double, Index, const SmoothTable::Options&);

}  // namespace tarn::runtime
