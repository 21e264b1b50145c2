#pragma once
/// \file The right-hand side of a hierarchy: one sweep over its matrices.
///
///   d x_a = left x_a + x_a right + sum_j first_j x_a second_j - decay_a x_a
///           + sum_c ( -i [A_c, P_ac] - i {A_c, D_ac} - white_c o x_a ),
/// with P_ac = sum over links (sum x_to), D_ac = sum over links (difference x_to), o elementwise.
///
/// A matrix takes 2 N^2 doubles: real parts row by row, then imaginary parts. Numbers of hierarchy_indices.h follow
/// each other without holes.

#include <Eigen/Core>
#include <vector>

#include "runtime/equation/hierarchy_indices.h"
#include "runtime/integrate/vectors.h"

namespace tarn::runtime {

/// x -> first x second, in the layout of matrices.
struct HierarchySandwich {
  AlignedArray first, second;
};

struct HierarchyCoupling {
  bool diagonal = false;
  AlignedArray matrix;       ///< A, unless diagonal.
  AlignedArray differences;  ///< Diagonal: a_i - a_j, N^2.
  AlignedArray sums;         ///< a_i + a_j.
};

/// All that depends on s and t.
struct HierarchyOperators {
  AlignedArray left, right;  ///< -i (H - i K) and its adjoint, K >= 0 from jumps and white rests.
  AlignedArray white;        ///< N^2, of all diagonal couplings: sum rest (a_i - a_j)^2 [1/ns].
  std::vector<HierarchySandwich> sandwiches;
  std::vector<HierarchyCoupling> couplings;
};

/// x (N x N) in the layout of matrices.
AlignedArray hierarchy_block(const Eigen::MatrixXcd& x);
void store_block(const Eigen::MatrixXcd& x, double* block);
Eigen::MatrixXcd matrix_of_block(Eigen::Index dimension, const double* block);

/// Operators from H, the couplings' matrices, the rest of each bath and the jumps.
void set_operators(const Eigen::MatrixXcd& h, const std::vector<Eigen::MatrixXcd>& couplings, const std::vector<double>& rests,
                   const std::vector<Eigen::MatrixXcd>& jumps, HierarchyOperators& operators);

/// N is 2, 4 or 8. d overlaps nothing; both at multiples of 64 bytes.
void hierarchy_sweep(Eigen::Index dimension, const HierarchyIndices& indices, const HierarchyOperators& operators,
                     const double* x, double* d);

}  // namespace tarn::runtime
