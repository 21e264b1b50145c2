#pragma once
/// \file d rho/dt of a fast-noise equation, with the chip's Hamiltonian (terms in t included) and the
/// jumps as written: made ready at some instants, then applied to density matrices there.

#include <Eigen/Core>
#include <cstdint>
#include <functional>
#include <memory>
#include <span>
#include <vector>

#include "runtime/generator/noise_table.h"
#include "runtime/generator/small_apply.h"
#include "runtime/levels/product.h"

namespace tarn::runtime {

/// A sum of matrices, each times the coefficient of its row.
struct MatrixSum {
  std::vector<std::uint32_t> rows;
  std::vector<Eigen::MatrixXcd> matrices;
};

/// What acts beside the baths, in the basis of the table. Parts of one run.
struct LabOperators {
  std::uint32_t rows = 0;
  MatrixSum hamiltonian;         ///< Hermitian, drive included [rad/ns].
  std::vector<MatrixSum> jumps;  ///< Lindblad operators as written [1/sqrt(ns)].
  /// out[row * count + point] of count points (s, t); pure.
  std::function<void(std::span<const double> s, std::span<const double> t, double* out)> coefficients;
};

/// Of one run and one thread.
class OpenGenerator {
 public:
  OpenGenerator(std::shared_ptr<const NoiseTable> table, const LabOperators& lab);

  Eigen::Index dimension() const { return layout_.dimension; }
  /// The dissipative part depends on t itself.
  bool reads_t() const { return table_->along_time(); }

  /// Makes ready the instants (s[k], t[k]), numbered from 0. False at an instant whose coefficients are not finite.
  std::vector<bool> prepare(std::span<const double> s, std::span<const double> t);

  /// out <- d rho/dt at instant k; both N x N pairs, column after column, rho Hermitian.
  void apply(std::size_t k, const double* rho, double* out);

  /// The generator of instant k as an N^2 x N^2 matrix on rho column after column.
  Eigen::MatrixXcd dense(std::size_t k);

 private:
  struct Instant {
    double s = 0, t = 0;
    bool filled = false;
    std::vector<double> noise;            ///< As NoiseLayout has it.
    std::vector<Eigen::MatrixXcd> jumps;  ///< L / sqrt(2).
    Eigen::MatrixXcd drift;               ///< -iH and the losses.
    std::vector<SmallTerm> terms;         ///< Of small systems: all of them.
  };

  bool is_small() const;
  void list_terms(Instant& at) const;
  void apply_large(const Instant& at, const double* rho, double* out);
  void add_split(const Instant& at, const Eigen::MatrixXcd& rho, Eigen::MatrixXcd& change);
  void fill(Instant& instant, double s, double t);

  std::shared_ptr<const NoiseTable> table_;
  const LabOperators& lab_;
  NoiseLayout layout_;
  std::vector<Eigen::VectorXd> diagonal_right_;  ///< Of fixed_right(), where it is diagonal and real.
  std::vector<Instant> instants_;
  std::vector<double> coefficients_;
  Scratch scratch_;
  Eigen::MatrixXcd state_, stacked_left_, stacked_right_, change_;
  Eigen::MatrixXd real_left_, real_right_, real_state_, real_out_;
  Eigen::VectorXd even_, odd_, even_out_, odd_out_;
};

}  // namespace tarn::runtime
