#pragma once
/// \file The input block of a kernel: parameters in every lane, and the numbers of its tables.

#include <array>
#include <cstdint>
#include <span>
#include <vector>

#include "runtime/kernel/kernel.h"

namespace tarn::runtime {

/// The numbers of a piecewise cubic: m + 1 knots, and c[k][j], the coefficient of
/// (x - knots[j])^k on piece j < m.
struct TableNumbers {
  std::vector<double> knots;
  std::array<std::vector<double>, 4> c;
};

/// Owns what a kernel reads. A move keeps the block valid. Writing while a kernel reads is a race.
class InputBlock {
 public:
  /// All inputs zero. Precondition: one table for each of the kernel's, each with as many pieces as
  /// the kernel was compiled for, every column complete.
  InputBlock(const Kernel& kernel, std::span<const TableNumbers> tables);
  InputBlock(InputBlock&&) = default;
  InputBlock& operator=(InputBlock&&) = default;

  /// The same value in every lane.
  void set(std::uint32_t input, double value);
  /// `value` in one lane.
  void set(std::uint32_t input, std::uint32_t lane, double value);
  /// All inputs in order, each in every lane.
  void set_all(std::span<const double> values);

  double get(std::uint32_t input, std::uint32_t lane = 0) const;
  const tarn_block* block() const { return &view_; }

 private:
  std::uint32_t lanes_;
  std::vector<double> inputs_;
  std::vector<std::vector<double>> tables_;
  std::vector<const double*> pointers_;
  tarn_block view_;
};

}  // namespace tarn::runtime
