#include "runtime/levels/family.h"

#include <bit>
#include <complex>
#include <limits>
#include <memory>
#include <type_traits>

#include "lang/support/check.h"
#include "runtime/levels/product.h"
#include "runtime/linear/eigensystem.h"

namespace tarn::runtime {
namespace {

using Complex = std::complex<double>;

bool is_real(const OperatorSum& sum) {
  for (const auto& group : sum.groups)
    for (const auto& term : group.terms)
      if (std::popcount(term.word.x & term.word.z) % 2 != 0 || term.factor.imag() != 0) return false;
  return true;
}

template <class Scalar>
Scalar narrow(Complex value) {
  if constexpr (std::is_same_v<Scalar, double>) {
    TARN_CHECK(value.imag() == 0);
    return value.real();
  } else {
    return value;
  }
}

Complex power_of_i(int exponent) {
  constexpr Complex kPowers[] = {{1, 0}, {0, 1}, {-1, 0}, {0, -1}};
  return kPowers[exponent % 4];
}

}  // namespace

// Named, because the functions handed out hold them: GCC warns of that where sources are joined.

/// One operator as dense matrices, each with the row of its coefficient.
template <class Scalar>
struct DenseSum {
  std::vector<std::uint32_t> rows;
  std::vector<Matrix<Scalar>> matrices;

  Matrix<Scalar> at(const std::vector<double>& coefficients, Eigen::Index dimension) const {
    Matrix<Scalar> sum = Matrix<Scalar>::Zero(dimension, dimension);
    for (std::size_t g = 0; g < rows.size(); ++g) sum += coefficients[rows[g]] * matrices[g];
    return sum;
  }
};

template <class Scalar>
DenseSum<Scalar> make_dense(const OperatorSum& sum, const HamiltonianFamily& family) {
  DenseSum<Scalar> dense;
  for (const auto& group : sum.groups) {
    TARN_CHECK(group.coefficient < family.rows);
    dense.rows.push_back(group.coefficient);
    dense.matrices.push_back(dense_matrix<Scalar>(group.terms, family.qubits));
  }
  return dense;
}

template <class Scalar>
struct DenseFamily {
  Eigen::Index dimension;
  std::uint32_t rows;
  DenseSum<Scalar> hamiltonian;
  std::vector<DenseSum<Scalar>> couplings;
  CoefficientFunction coefficients, derivative;

  explicit DenseFamily(const HamiltonianFamily& family)
      : dimension(Eigen::Index{1} << family.qubits),
        rows(family.rows),
        hamiltonian(make_dense<Scalar>(family.hamiltonian, family)),
        coefficients(family.coefficients),
        derivative(family.derivative) {
    for (const auto& sum : family.couplings) couplings.push_back(make_dense<Scalar>(sum, family));
  }

  std::vector<double> values(const CoefficientFunction& function, double s) const {
    std::vector<double> out(rows);
    function({&s, 1}, out.data());
    return out;
  }
};

namespace {

template <class Scalar>
Frame<Scalar> solve_dense(const Matrix<Scalar>& hamiltonian, double s, Eigen::Index count) {
  const Eigensystem<Scalar> all_levels = eigensystem(hamiltonian);
  TARN_CHECK(all_levels.converged);
  Frame<Scalar> frame;
  frame.s = s;
  frame.energies = all_levels.values.head(count);
  frame.vectors = all_levels.vectors.leftCols(count);
  const bool all = count == hamiltonian.rows();
  frame.next = all ? std::numeric_limits<double>::infinity() : all_levels.values[count];
  frame.residual = (product<Scalar>(hamiltonian, frame.vectors) - frame.vectors * frame.energies.asDiagonal())
                       .colwise()
                       .norm()
                       .maxCoeff();
  return frame;
}

}  // namespace

bool is_real(const HamiltonianFamily& family) {
  if (!is_real(family.hamiltonian)) return false;
  for (const auto& coupling : family.couplings)
    if (!is_real(coupling)) return false;
  return true;
}

template <class Scalar>
Matrix<Scalar> dense_matrix(const std::vector<WordTerm>& terms, int qubits) {
  const auto dimension = std::uint64_t{1} << qubits;
  Matrix<Scalar> sum = Matrix<Scalar>::Zero(static_cast<Eigen::Index>(dimension), static_cast<Eigen::Index>(dimension));
  for (const auto& [factor, word] : terms) {
    const Complex phase = factor * power_of_i(std::popcount(word.x & word.z));
    for (std::uint64_t column = 0; column < dimension; ++column) {
      const double sign = std::popcount(word.z & column) % 2 == 0 ? 1.0 : -1.0;
      sum(static_cast<Eigen::Index>(column ^ word.x), static_cast<Eigen::Index>(column)) += narrow<Scalar>(phase * sign);
    }
  }
  return sum;
}

template <class Scalar>
LevelModel<Scalar> dense_levels(const HamiltonianFamily& family) {
  const auto dense = std::make_shared<const DenseFamily<Scalar>>(family);
  LevelModel<Scalar> model;
  model.dimension = dense->dimension;
  model.couplings = dense->couplings.size();
  model.breaks = family.breaks;
  model.solve = [dense](double s, Eigen::Index count) {
    return solve_dense<Scalar>(dense->hamiltonian.at(dense->values(dense->coefficients, s), dense->dimension), s, count);
  };
  model.slope = [dense](double s, const Matrix<Scalar>& columns) -> Matrix<Scalar> {
    return product<Scalar>(dense->hamiltonian.at(dense->values(dense->derivative, s), dense->dimension), columns);
  };
  model.coupling = [dense](std::size_t c, double s, const Matrix<Scalar>& columns) -> Matrix<Scalar> {
    return product<Scalar>(dense->couplings[c].at(dense->values(dense->coefficients, s), dense->dimension), columns);
  };
  return model;
}

template <class Scalar>
std::function<Matrix<Scalar>(double)> dense_hamiltonian(const HamiltonianFamily& family) {
  const auto dense = std::make_shared<const DenseFamily<Scalar>>(family);
  return [dense](double s) {
    return dense->hamiltonian.at(dense->values(dense->coefficients, s), dense->dimension);
  };
}

template Matrix<double> dense_matrix<double>(const std::vector<WordTerm>&, int);
template Matrix<Complex> dense_matrix<Complex>(const std::vector<WordTerm>&, int);
template LevelModel<double> dense_levels<double>(const HamiltonianFamily&);
template LevelModel<Complex> dense_levels<Complex>(const HamiltonianFamily&);
template std::function<Matrix<double>(double)> dense_hamiltonian<double>(const HamiltonianFamily&);
template std::function<Matrix<Complex>(double)> dense_hamiltonian<Complex>(const HamiltonianFamily&);

}  // namespace tarn::runtime
