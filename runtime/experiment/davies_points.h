#pragma once
/// \file Davies' equation for the points of one plan: tracks and tables that points share.

#include <memory>
#include <variant>
#include <vector>

#include "runtime/equation/davies.h"
#include "runtime/equation/davies.h"
#include "runtime/experiment/chip_family.h"
#include "runtime/experiment/generator_at.h"
#include "runtime/experiment/keyed_cache.h"

namespace tarn::runtime {

/// Safe to use from several threads; a point's bits do not depend on
/// which thread made a track, or when.
class DaviesPoints {
 public:
  /// `kept` >= 1 tracks, and the tables of as many baths on them, stay in memory, as far as a part of what the machine
  /// has left holds them; the rest is made anew when needed.
  DaviesPoints(const PlanModel& model, std::size_t kept);

  /// Repeats until the task wants no run. Errors end up in the task: `bad_bath`,
  /// `jump_depends_on_s`, and those of davies_pass().
  void advance(PointTask& task, const Interrupted& interrupted);

  /// As GeneratorAt has them (generator_at.h).
  Result<Mode, RunError> mode(PointTask& task, double s, std::optional<LevelPair> pair, const Interrupted& interrupted);
  Result<Density, RunError> steady(PointTask& task, double s, const Interrupted& interrupted);

 private:
  template <class Scalar>
  using TrackOf = std::shared_ptr<const Track<Scalar>>;
  template <class Scalar>
  using TablesOf = std::shared_ptr<const DaviesTables<Scalar>>;
  using AnyTrack = std::variant<TrackOf<double>, TrackOf<std::complex<double>>>;
  using AnyTables = std::variant<TablesOf<double>, TablesOf<std::complex<double>>>;

  struct Standing;

  Result<AnyTables, RunError> tables_for(PointTask& task, const Interrupted& interrupted);
  Result<Standing, RunError> standing(PointTask& task, double s, const Interrupted& interrupted);

  const PlanModel& model_;
  std::shared_ptr<MemoryBudget> memory_;
  KeyedCache<AnyTrack> tracks_;
  KeyedCache<Result<AnyTables, RunError>> tables_;
};

}  // namespace tarn::runtime
