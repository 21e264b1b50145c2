#pragma once
/// \file What an answer is held against to see how far off it may be.

#include <vector>

#include "runtime/equation/propagate.h"

namespace tarn::runtime {

/// States at the times wanted that are less good than an answer's.
struct CoarserStates {
  std::vector<Density> states;
  double weight = 1;  ///< Error of an observable of the answer, over its distance from here.
};

}  // namespace tarn::runtime
