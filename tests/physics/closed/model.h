#pragma once
/// \file Models written by hand behind the C functions of a kernel, so that the equations can be
/// tested without a compiler: G = sum over rows of c_row(s, t) times a sparse matrix.

#include <Eigen/Sparse>
#include <complex>
#include <cstdint>
#include <functional>
#include <vector>

#include "runtime/equation/propagate_linear.h"

namespace tarn::test {

using Complex = std::complex<double>;
using Sparse = Eigen::SparseMatrix<Complex, Eigen::RowMajor>;
using Dense = Eigen::MatrixXcd;

inline const Complex kI{0, 1};

struct Model {
  std::uint32_t bits = 1;
  bool reads_t = false;
  std::vector<Sparse> parts;
  /// Fills one number a row at (s, t); `lane` picks the parameters of a point.
  std::function<void(std::size_t lane, double s, double t, double* rows)> coefficients;
  /// Widest batch of points.
  std::uint32_t lanes = 1;

  tarn_block block() const;
  runtime::Entries entries() const;       ///< One point; reads lane 0.
  runtime::Entries lane_entries() const;  ///< `lanes` points at once.
  /// G at (s, t) of one point.
  Dense generator(std::size_t lane, double s, double t) const;
};

/// Pauli matrices of one qubit among n, the first being the leftmost: p is one of "xyzmp1",
/// m = |0><1|, p = |1><0|, 1 the identity.
Sparse on(char p, std::size_t qubit, std::size_t n);
/// -i H as a generator of amplitudes.
Sparse closed(const Sparse& h);
/// rho -> -i [H, rho] with element (row, column) at row 2^n + column.
Sparse commutator(const Sparse& h);
/// rho -> L rho L^dagger - {L^dagger L, rho}/2, stored in the same way.
Sparse dissipator(const Sparse& l);

/// The state at the times asked for, one row a time; density matrices row by row. Fails the test on an
/// error.
struct Trace {
  std::vector<Eigen::VectorXcd> states;
  runtime::Counters counters;
};
Trace run_closed(const Model& model, const runtime::Timeline& timeline, const Eigen::VectorXcd& initial,
                 double tolerance, std::vector<double> times, std::vector<double> breaks = {});
Trace run_lindblad(const Model& model, const runtime::Timeline& timeline, const Dense& initial,
                   double tolerance, std::vector<double> times, std::vector<double> breaks = {});

/// One segment from s = 0 to 1 over `duration`.
runtime::Timeline ramp(double duration);

}  // namespace tarn::test
