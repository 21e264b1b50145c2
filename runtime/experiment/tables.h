#pragma once
/// \file Finished points as the tables an experiment leaves, and back again.
///
/// results.csv has a row a grid point (of a scan: a row for each s), traces.csv a row an instant,
/// distribution.csv a row a bit string; all start with the swept parameters, first sweep slowest.
/// Shown value = internal value / factor, written with as many digits as reading back needs.

#include <map>
#include <optional>
#include <span>
#include <string>
#include <vector>

#include "lang/support/result.h"
#include "runtime/experiment/csv.h"
#include "runtime/experiment/outcome.h"

namespace tarn::runtime {

/// File name -> table; files that the plan does not ask for are missing.
using ResultTables = std::map<std::string, CsvTable>;

/// `name [unit]`, or the bare name of a plain number.
std::string column_name(const std::string& name, const DisplayUnit& unit);

/// A parameter's value as shown: the shortest decimal that means the value to rounding.
std::string parameter_text(double value, const DisplayUnit& unit);

/// The tables of `outcomes`, which are in grid order; plan_of[i] is the plan outcome i was run by.
/// `plan` gives the columns: all plans belong to one experiment and differ by counts only.
ResultTables make_tables(std::span<const PointOutcome* const> outcomes, std::span<const Plan* const> plan_of,
                         const Plan& plan);

/// What make_tables wrote for the points `indices` (ascending; plan_of as above), by row: see row_of().
/// Points whose rows are missing are left out. Observables that read reductions or are not shown
/// are not filled: see complete_reductions(). The error says which file does not fit the plan.
Result<std::map<std::uint64_t, PointOutcome>, std::string> read_tables(
    const ResultTables& tables, std::span<const std::uint64_t> indices, std::span<const Plan* const> plan_of);

/// Rounds every answer to what its shown text reads back as, so that a continued run and a run in
/// one go judge the same numbers.
void round_to_shown(const Plan& plan, PointOutcome& outcome);

}  // namespace tarn::runtime
