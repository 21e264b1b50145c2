#pragma once
/// \file Choice of the base nodes of a track.

#include <vector>

#include "runtime/levels/track.h"

namespace tarn::runtime {

template <class Scalar>
struct BaseGrid {
  std::vector<Frame<Scalar>> nodes;  ///< s ascending; bases continue from node to node.
  Eigen::Index levels = 0;
  double width = 0;      ///< [rad/ns]
  bool resolved = true;  ///< False: `max_intervals` ended the refinement.
};

/// Bisects until rotations are small and labels cross only where nothing couples them: a pair that
/// swaps its order with an estimated gap 2 |<a|H'|b>| |E_a - E_b| / |E'_a - E'_b| above 1e-10 of
/// the width is refined until the gap is seen. Where coinciding frequencies part, a node is put.
template <class Scalar>
BaseGrid<Scalar> base_grid(const LevelModel<Scalar>& model, const TrackOptions& options);

}  // namespace tarn::runtime
