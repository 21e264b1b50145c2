#pragma once
/// \file How far the mean over N trajectories may be off.
///
/// Trajectories are dealt to groups. Whatever is read off all of them, a mean or any smooth function of means
/// (purity, a ratio, the lowest value along time), is read off once more without each group in turn: how these values
/// scatter tells the standard error (jackknife: Biometrika 43, 353 (1956); Ann. Math. Stat. 29, 614 (1958)). Starts spread evenly over a mixture are
/// spread evenly over the groups too, so that the scatter does not count what sampling them apart would have added.

#include <cstddef>
#include <span>

namespace tarn::runtime {

/// The error's own relative error is about 1/sqrt(2 (groups - 1)): 9 % with these.
inline constexpr std::size_t kMostSampleGroups = 64;

/// Groups of n trajectories: kMostSampleGroups, or n if that is less.
std::size_t sample_groups(std::size_t trajectories);
/// The group of a trajectory.
std::size_t sample_group(std::size_t trajectory, std::size_t trajectories);

/// Standard error from the values without each group in turn; infinite for fewer than two groups.
double jackknife_error(std::span<const double> without);

/// The part of a value's error that falls as 1/N, such as that of a purity, to be subtracted from the value `all` of
/// all trajectories; 0 for means.
double jackknife_bias(double all, std::span<const double> without);

}  // namespace tarn::runtime
