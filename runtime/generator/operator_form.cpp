#include "runtime/generator/operator_form.h"

#include <cmath>

#include "lang/support/check.h"
#include "runtime/levels/product.h"
#include "runtime/levels/track.h"

namespace tarn::runtime {
namespace {

using Complex = std::complex<double>;
using Index = Eigen::Index;

/// w_nm = E_m - E_n of all pairs, n fastest.
std::vector<double> frequencies(const Eigen::VectorXd& energies) {
  std::vector<double> w;
  for (Index m = 0; m < energies.size(); ++m)
    for (Index n = 0; n < energies.size(); ++n) w.push_back(energies[m] - energies[n]);
  return w;
}

/// V x V^dagger.
template <class Scalar, class Level>
Matrix<Level> to_basis(const Frame<Scalar>& frame, const Matrix<Level>& x) {
  const Matrix<Level> v = frame.vectors.template cast<Level>();
  return product<Level>(product<Level>(v, x), v.adjoint());
}

/// u_q(w_nm) A_nm.
template <class Scalar>
Matrix<Scalar> weighted(const Matrix<Scalar>& coupling, const Eigen::MatrixXd& factors, Index q) {
  const Eigen::Map<const Eigen::MatrixXd> u(factors.col(q).data(), coupling.rows(), coupling.cols());
  return u.template cast<Scalar>().cwiseProduct(coupling);
}

}  // namespace

template <class Scalar>
OperatorForm redfield_form(const LevelModel<Scalar>& model, const Frame<Scalar>& frame, std::span<const FastBath> baths,
                           bool shift, double t) {
  TARN_CHECK(baths.size() == model.couplings);
  const Index levels = frame.energies.size();
  const std::vector<double> w = frequencies(frame.energies);
  Eigen::MatrixXcd gamma(levels, levels), loss = Eigen::MatrixXcd::Zero(levels, levels);
  OperatorForm form;
  for (std::size_t c = 0; c < baths.size(); ++c) {
    if (baths[c].growing) baths[c].growing(t, w, gamma.data());
    else baths[c].half_range(w, gamma.data());
    const Eigen::MatrixXcd coupling = coupling_elements(model, c, frame).template cast<Complex>();
    const Eigen::MatrixXcd response = gamma.cwiseProduct(coupling);
    loss += product<Complex>(coupling, response);
    form.left.push_back(to_basis<Scalar, Complex>(frame, response));
    form.right.push_back(to_basis<Scalar, Complex>(frame, coupling));
  }
  if (!shift) loss = (0.5 * (loss + loss.adjoint())).eval();
  form.drift = -to_basis<Scalar, Complex>(frame, loss);
  return form;
}

template <class Scalar>
OperatorForm lindblad_form(const LevelModel<Scalar>& model, const Frame<Scalar>& frame, std::span<const FastBath> baths,
                           bool shift) {
  TARN_CHECK(baths.size() == model.couplings);
  const Index levels = frame.energies.size();
  const std::vector<double> w = frequencies(frame.energies);
  Matrix<Scalar> loss = Matrix<Scalar>::Zero(levels, levels), energy = loss;
  OperatorForm form;
  for (std::size_t c = 0; c < baths.size(); ++c) {
    const Matrix<Scalar> coupling = coupling_elements(model, c, frame);
    const PairFunctions& pair = *baths[c].pair;
    const Eigen::MatrixXd u = pair.rate.factors(w);
    for (Index q = 0; q < u.cols(); ++q) {
      const Matrix<Scalar> jump = std::sqrt(pair.rate.values()[q]) * weighted<Scalar>(coupling, u, q);
      loss += product<Scalar>(jump.adjoint(), jump);
      form.left.push_back((std::sqrt(0.5) * to_basis<Scalar, Scalar>(frame, jump)).template cast<Complex>());
    }
    if (!shift) continue;
    const Eigen::MatrixXd v = pair.shift.factors(w);
    for (Index q = 0; q < v.cols(); ++q) {
      const Matrix<Scalar> half = weighted<Scalar>(coupling, v, q);
      energy += pair.shift.values()[q] * product<Scalar>(half.adjoint(), half);
    }
  }
  const Eigen::MatrixXcd drift = -0.5 * loss.template cast<Complex>() - Complex(0, 1) * energy.template cast<Complex>();
  form.drift = to_basis<Scalar, Complex>(frame, drift);
  return form;
}

template OperatorForm redfield_form<double>(const LevelModel<double>&, const Frame<double>&, std::span<const FastBath>, bool, double);
template OperatorForm redfield_form<Complex>(const LevelModel<Complex>&, const Frame<Complex>&, std::span<const FastBath>, bool, double);
template OperatorForm lindblad_form<double>(const LevelModel<double>&, const Frame<double>&, std::span<const FastBath>, bool);
template OperatorForm lindblad_form<Complex>(const LevelModel<Complex>&, const Frame<Complex>&, std::span<const FastBath>, bool);

}  // namespace tarn::runtime
