#pragma once
/// \file Davies' equation for the points of one plan: tracks and tables that points share.

#include <memory>
#include <variant>
#include <vector>

#include "runtime/equation/davies.h"
#include "runtime/experiment/keyed_cache.h"
#include "runtime/experiment/point.h"

namespace tarn::runtime {

/// Safe to use from several threads; a point's bits do not depend on
/// which thread made a track, or when.
class DaviesPoints {
 public:
  /// `kept` >= 1 tracks, and the tables of as many baths on them, stay in memory, as far as a part of what the machine
  /// has left holds them; the rest is made anew when needed.
  DaviesPoints(const PlanModel& model, std::size_t kept);

  /// What points must share, bit by bit, to share a track: the coefficients of the Hamiltonian and
  /// of the noise operators, sampled along s. Points that go one after the other are cheapest when
  /// equal keys stand together.
  std::vector<double> track_key(const Functions& functions) const;
  bool finite_levels(const Functions& functions) const;

  /// Repeats until the task wants no run. Errors end up in the task: `bad_bath`,
  /// `jump_depends_on_s`, and those of davies_pass().
  void advance(PointTask& task, const Interrupted& interrupted);

 private:
  template <class Scalar>
  using TrackOf = std::shared_ptr<const Track<Scalar>>;
  template <class Scalar>
  using TablesOf = std::shared_ptr<const DaviesTables<Scalar>>;
  using AnyTrack = std::variant<TrackOf<double>, TrackOf<std::complex<double>>>;
  using AnyTables = std::variant<TablesOf<double>, TablesOf<std::complex<double>>>;

  Result<AnyTables, RunError> tables_for(PointTask& task, const Interrupted& interrupted);
  AnyTrack make_track(const PointTask& task, const Interrupted& interrupted) const;
  Result<AnyTables, RunError> make_tables(const PointTask& task, const AnyTrack& track) const;

  const PlanModel& model_;
  std::shared_ptr<MemoryBudget> memory_;
  KeyedCache<AnyTrack> tracks_;
  KeyedCache<Result<AnyTables, RunError>> tables_;
};

}  // namespace tarn::runtime
