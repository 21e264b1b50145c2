#pragma once
/// \file One step of Davies' equation between two frames, and a hold at one frame.

#include <Eigen/Core>
#include <vector>

#include "runtime/equation/davies_table.h"
#include "runtime/levels/product.h"

namespace tarn::runtime {

/// Buffers of advance(): one for each walk.
template <class Scalar>
struct StepBuffers {
  Scratch scratch;
  Matrix<Scalar> variation, turn, weighted, shifts;
  Matrix<std::complex<double>> w, r, carried, before, after;
};

/// rho (K x K) from the basis of the step's start to that of its end, in time h > 0 [ns]; backward: from
/// end to start. Local error O(h^3), global order 2. Gives what it leaves out of populations where h spans
/// many turns of a pair: an estimate that falls as h^4 once it does not.
template <class Scalar>
double advance(const StepFrames<Scalar>& step, const DaviesTable& table, double h, bool backward,
             Eigen::MatrixXcd& rho, StepBuffers<Scalar>& buffers);

/// exp(t L) with the whole static generator L at one frame, t any: independent blocks of pairs,
/// a dense exponential each; pairs of their own by a number. Relative error about 1e-13 t |L|.
class HoldMap {
 public:
  HoldMap(const Eigen::VectorXd& energies, const DaviesTable& table);
  void apply(double t, Eigen::MatrixXcd& rho);
  std::size_t exponentials() const { return exponentials_; }

 private:
  struct Block {
    std::vector<std::uint32_t> pairs;
    double frequency;            ///< Mean of E_a - E_b.
    Eigen::MatrixXcd generator;  ///< In the frame that turns with `frequency`.
    Eigen::MatrixXcd map;        ///< Exponential for `prepared_`.
  };
  void prepare(double t);

  std::vector<Block> blocks_;
  Eigen::MatrixXcd exponent_;  ///< Of the pairs of their own.
  std::vector<std::uint8_t> single_;
  double prepared_ = -1;
  std::size_t exponentials_ = 0;
};

}  // namespace tarn::runtime
