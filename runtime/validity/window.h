#pragma once
/// \file What the averaging window of the coarse-grained equation does to an answer.

#include <Eigen/Core>
#include <functional>
#include <span>
#include <string>
#include <vector>

namespace tarn::runtime {

/// How much population a window moves against detailed balance: a window T_a blurs gamma by 1/T_a, so that upward jumps
/// find rate from frequencies far above. The largest over pairs of levels of
///   |Delta p|,  p = up / (up + down) the share of the upper level if that pair were alone,
/// Delta from gamma to its average, each a sum over the operators with |A_nm|^2. Pairs without rate say nothing.
/// `elements`: <a|A_c|b>, K x K, one for every coupling; `rates` and `averaged`: gamma_c(w) and c_c(w, w) [1/ns].
double window_heating(const Eigen::VectorXd& energies, std::span<const Eigen::MatrixXcd> elements,
                      std::span<const std::function<void(std::span<const double>, double*)>> rates,
                      std::span<const std::function<void(std::span<const double>, double*)>> averaged);

/// How far answers move when every window is halved and doubled.
struct WindowChange {
  std::vector<double> halved, doubled;  ///< Answer of the other window less the answer; NaN where one has no value.
  std::size_t largest = 0;              ///< The answer that moves most, against its scale.
  std::string sentence;                 ///< On that one: lower case, no full stop. Empty without answers.
};

/// Answers of three runs that differ in the window alone, all of one length. `names`: of the answers. `scales`: > 0, what a
/// change of each is held against, in its own unit (1 for populations).
WindowChange window_change(std::span<const std::string> names, std::span<const double> scales, std::span<const double> answers,
                           std::span<const double> halved, std::span<const double> doubled);

}  // namespace tarn::runtime
