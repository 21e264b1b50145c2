#pragma once
/// \file run.json: what was run, on what, and what came out.

#include <cstdint>
#include <map>
#include <nlohmann/json_fwd.hpp>
#include <string>

#include "runtime/experiment/run.h"

namespace tarn::runtime {

/// Everything the answers depend on: two runs with the same key have the same answers.
nlohmann::ordered_json run_key(const Plan& plan, const RunOptions& options);

/// The text of run.json. What differs from run to run stands under `machine` alone.
std::string run_record(const RunReport& report, const nlohmann::ordered_json& key, const RunOptions& options);

/// What the record of an interrupted run says about points that will not be run again.
struct Recorded {
  Counters counters;
  std::vector<std::string> remarks;
  double leakage = 0;
  std::map<std::uint64_t, Place> places;  ///< What is at fault, of failed points by grid index.
  bool stalled = false;  ///< It ran out of time before a point was done.
};
Recorded read_record(const std::string& record);

}  // namespace tarn::runtime
