#pragma once
/// \file One experiment from its plans to its files and its report.

#include <cstdint>
#include <filesystem>
#include <functional>
#include <map>
#include <optional>
#include <span>
#include <string>
#include <vector>

#include "lang/support/result.h"
#include "runtime/experiment/claims.h"
#include "runtime/experiment/folder.h"
#include "runtime/experiment/outcome.h"
#include "runtime/kernel/input_block.h"
#include "runtime/kernel/kernel.h"
#include "runtime/plan/plan.h"

namespace tarn::runtime {

/// A plan, the kernel compiled for it, and the numbers of the kernel's tables.
struct PlanAndKernel {
  Plan plan;
  Kernel kernel;
  std::vector<TableNumbers> tables;
};

/// What the answers depend on beside plan and kernel: part of a folder's key.
struct Provenance {
  struct Text {
    std::string name;
    std::string sha256;
  };
  std::string version;      ///< Of the program.
  std::string build;        ///< Of the program and of its code generator: bits depend on both.
  std::vector<Text> texts;  ///< Models, tables and the library; names relative to the main model's folder.
  std::map<std::string, double> counts;  ///< Counts that were set, which no plan shows.
  std::string host;         ///< Stands under `machine`: no part of the key.
};

/// Points that are done, of how many, and the seconds that the rest may take (NaN: unknown yet). Called
/// after each group of points, and now and then while a scan goes on.
using Progress = std::function<void(std::uint64_t done, std::uint64_t total, double seconds_left)>;

struct RunOptions {
  std::size_t jobs = 1;                       ///< Threads, >= 1.
  /// So many grid points only, spread evenly; and those that the folder holds already.
  std::optional<std::uint64_t> sample;
  std::optional<std::filesystem::path> out;   ///< DIR: results go to DIR/EXPERIMENT. None: no files.
  std::function<bool()> interrupted;          ///< Asked often, from several threads.
  Progress progress;                          ///< Called from one thread at a time.
  Provenance provenance;
  /// Seconds from the call. Where the last run into this folder ran out of time before any point was done,
  /// this one goes on until one is: who comes again gets on.
  std::optional<double> time_limit;
};

enum class Ending : std::uint8_t { finished, interrupted, out_of_time };

struct RunReport {
  std::string experiment;
  Ending ending = Ending::finished;
  std::uint64_t grid = 0;                     ///< Points of the whole grid.
  std::uint64_t total = 0;                    ///< Points asked for: the grid's, or a sample's.
  std::vector<PointOutcome> points;           ///< Those finished, in grid order.
  std::vector<const Plan*> plan_of;           ///< The plan of each; points into the argument of run_experiment.
  const Plan* any_plan = nullptr;             ///< The first plan: names and axes are those of all.
  std::uint64_t reused = 0;                   ///< Read from the folder.
  std::uint64_t fresh = 0;                    ///< Computed by this run.
  std::uint64_t failed = 0, loose = 0;        ///< Failed points; answers that are marked.
  std::vector<ClaimReport> claims;
  std::vector<std::string> left_out, remarks;
  double leakage = 0;                         ///< The most that left the levels kept, an upper estimate.
  Counters counters;
  double seconds = 0;
  std::optional<FolderError> not_written;     ///< The files could not be written; the rest is as computed.
};

/// Judges DIR/EXPERIMENT as run_experiment() will, so that several can be judged before any is run.
Result<Done, FolderError> judge_folder(std::span<const PlanAndKernel> plans, const RunOptions& options);

/// Runs the grid. Every bit of points, claims and files, what stands under `machine` in run.json
/// excepted, is the same for any number of jobs, and for a run that was interrupted and continued or
/// sampled first.
/// Errors: those of the folder, found before anything is computed or written.
Result<RunReport, FolderError> run_experiment(std::span<const PlanAndKernel> plans, const RunOptions& options);

/// The exit status of the command line: 2 if the files could not be written, else 3 if a point failed
/// or the run did not finish, else 1 if a claim failed, else 0.
int exit_status(const RunReport& report);

}  // namespace tarn::runtime
