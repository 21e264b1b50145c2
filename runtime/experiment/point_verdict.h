#pragma once
/// \file The verdicts on an equation at instants of one run.

#include <algorithm>
#include <string>
#include <utility>
#include <vector>

#include "runtime/validity/validity.h"

namespace tarn::runtime {

struct PointVerdict {
  std::vector<std::pair<double, Validity>> at;  ///< t [ns], ascending, and the verdict there; none: within throughout.
  std::string reason;                           ///< What is not within its range, by what and where; else empty.

  /// The worst up to t.
  Validity until(double t) const {
    Validity worst = Validity::within;
    for (const auto& [when, validity] : at) {
      if (when <= t) worst = std::max(worst, validity);
    }
    return worst;
  }
};

}  // namespace tarn::runtime
