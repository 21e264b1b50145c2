#pragma once
/// \file Many functions of s at once as piecewise polynomials.
///
/// Operators that a generator is made from are smooth functions of H(s), also through crossings
/// far narrower than the bath's memory: few nodes serve every anneal time and pace.

#include <cstddef>
#include <functional>
#include <optional>
#include <span>
#include <vector>

namespace tarn::runtime {

class SmoothTable {
 public:
  /// Writes `size` values at s. Must be pure.
  using Function = std::function<void(double s, double* out)>;

  struct Options {
    std::size_t size = 0;
    std::vector<double> breaks;      ///< Ends of the range and where the function may bend, ascending: two or more.
    double tolerance = 1e-9;         ///< Of the largest value in the table.
    std::size_t most_values = 0;     ///< Of all panels together; 0 is no limit.
    std::function<bool()> interrupted = {};
  };

  /// Bisects until the interpolants agree with the function at two points that they were not made from.
  /// Empty if interrupted.
  static std::optional<SmoothTable> make(const Function& function, const Options& options);

  /// All values at s. Precondition: s is within the range, to rounding.
  void at(double s, double* out) const { first(s, size_, out); }
  /// The first `count` of them.
  void first(double s, std::size_t count, double* out) const;

  std::size_t size() const { return size_; }
  /// The largest difference found that was let stand, in the function's unit.
  double error() const { return error_; }
  /// False if the values allowed, or the width of a panel, ended the refinement.
  bool resolved() const { return resolved_; }
  std::size_t panels() const { return lefts_.size(); }
  std::size_t evaluations() const { return evaluations_; }

 private:
  struct Builder;
  /// The interpolant of one panel at x in [-1, 1].
  void combine(const double* values, double x, std::size_t count, double* out) const;

  std::size_t size_ = 0, nodes_ = 0;
  std::vector<double> lefts_, rights_;       ///< Of each panel.
  std::vector<std::vector<double>> values_;  ///< Of each panel, node after node.
  std::vector<double> points_, weights_;     ///< Nodes on (-1, 1) and their barycentric weights.
  double error_ = 0;
  bool resolved_ = true;
  std::size_t evaluations_ = 0;
};

}  // namespace tarn::runtime
