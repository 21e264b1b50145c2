#include "runtime/experiment/run.h"

#include <fmt/format.h>
#include <unistd.h>

#include <chrono>
#include <csignal>
#include <cstdio>
#include <filesystem>
#include <set>
#include <thread>

#include "compiler/driver/commands.h"
#include "compiler/driver/messages.h"
#include "compiler/driver/model.h"
#include "compiler/driver/prepare.h"
#include "compiler/jit/digest.h"
#include "runtime/experiment/memory.h"
#include "runtime/experiment/notices.h"
#include "runtime/experiment/plan_model.h"
#include "runtime/experiment/summary.h"

namespace tarn::compiler {
namespace {

/// Set by Ctrl-C or a request to end; the second Ctrl-C ends at once.
volatile std::sig_atomic_t stop_requested = 0;

extern "C" void request_stop(int signal) {
  if (stop_requested != 0) std::signal(signal, SIG_DFL);
  stop_requested = 1;
}

void listen_for_stop() {
  struct sigaction action {};
  action.sa_handler = request_stop;
  for (const int signal : {SIGINT, SIGTERM}) sigaction(signal, &action, nullptr);
}

/// Points done and time left, on one line that is written over; nothing unless on a terminal.
class ProgressLine {
 public:
  ProgressLine(std::string experiment, bool wanted)
      : experiment_(std::move(experiment)), shown_(wanted && isatty(STDERR_FILENO) != 0) {}
  ~ProgressLine() {
    if (shown_) std::fputs("\r\033[K", stderr);
  }
  ProgressLine(const ProgressLine&) = delete;
  ProgressLine& operator=(const ProgressLine&) = delete;
  void operator()(std::uint64_t done, std::uint64_t total, double seconds_left) const {
    if (!shown_) return;
    const std::string left = seconds_left == seconds_left ? fmt::format(", {:.0f} s left", seconds_left) : "";
    fmt::print(stderr, "\r\033[K{}: {} of {} points{}", experiment_, done, total, left);
    std::fflush(stderr);
  }

 private:
  std::string experiment_;
  bool shown_;
};

/// A name relative to the main model's folder, so that where the command was given makes no difference.
std::string name_in_model(const std::string& name, const std::string& main_file) {
  if (name.starts_with('<')) return name;
  const std::filesystem::path folder = std::filesystem::path(main_file).lexically_normal().parent_path();
  const std::filesystem::path path = std::filesystem::path(name).lexically_normal();
  return folder.empty() ? path.generic_string() : path.lexically_relative(folder).generic_string();
}

/// Texts that stand in no file: what `--set` gave is found among the parameters and counts.
std::set<std::uint32_t> settings_of(const Program& program) {
  std::set<std::uint32_t> files;
  for (const Module& module : program.loaded->modules) {
    if (module.path.empty() && !module.library) files.insert(module.ast.file.row);
  }
  return files;
}

runtime::Provenance provenance_of(const LoadedModel& model, const RunCommand& command) {
  runtime::Provenance provenance;
  provenance.version = TARN_VERSION;
  provenance.build = program_build();
  const SourceSet& sources = model.program.sources();
  const std::set<std::uint32_t> settings = settings_of(model.program);
  for (std::uint32_t file = 0; file < sources.size(); ++file) {
    const SourceFile& source = sources.file(FileId{file});
    if (settings.contains(file)) continue;
    provenance.texts.push_back({name_in_model(source.name, command.model.file), to_hex(sha256(source.text))});
  }
  for (const ProgramParameter& parameter : model.program.parameters) {
    const auto set = model.overrides.find(parameter.name);
    if (!parameter.count) continue;
    if (set != model.overrides.end()) provenance.counts[parameter.name] = set->second;
    else if (parameter.value) provenance.counts[parameter.name] = *parameter.value;
  }
  char host[256] = {};
  if (gethostname(host, sizeof host - 1) == 0) provenance.host = host;
  return provenance;
}

std::filesystem::path results_folder(const RunCommand& command) {
  if (!command.out.empty()) return command.out;
  return std::filesystem::path(command.model.file).stem().string() + "-results";
}

unsigned jobs_of(const RunCommand& command) {
  return command.jobs > 0 ? command.jobs : std::max(1U, std::thread::hardware_concurrency());
}

/// An experiment whose kernels are there.
struct ReadyExperiment {
  std::string name;
  std::vector<runtime::PlanAndKernel> plans;
  EngineReport engine;
};

/// One command while it is carried out.
class Session {
 public:
  Session(const RunCommand& command, const LoadedModel& model) : command_(command), model_(model) {
    options_.sample = command.sample;
    options_.out = results_folder(command);
    options_.interrupted = [] { return stop_requested != 0; };
    options_.provenance = provenance_of(model, command);
  }

  std::optional<ReadyExperiment> prepare_experiment(const ChosenExperiment& experiment) const;
  bool folder_is_fine(const ReadyExperiment& experiment) const;
  int run(const ReadyExperiment& experiment);

 private:
  void say(const Message& message) const {
    show(message, command_.model.json_diagnostics, &model_.program.sources());
  }
  void pass_on(const runtime::Notice& notice) const;
  bool fits_the_memory(const ReadyExperiment& experiment);
  runtime::RunReport run_with_progress(const ReadyExperiment& experiment) const;

  const RunCommand& command_;
  const LoadedModel& model_;
  runtime::RunOptions options_;
  std::chrono::steady_clock::time_point start_ = std::chrono::steady_clock::now();
};

std::optional<ReadyExperiment> Session::prepare_experiment(const ChosenExperiment& experiment) const {
  ReadyExperiment ready{experiment.name, {}, {}};
  for (const Instance& instance : experiment.instances) {
    auto prepared = prepare(instance, model_.program.sources(), {.cache = command_.compile.cache}, ready.engine);
    if (!prepared) {
      say({"no_kernel", prepared.error().message});
      return std::nullopt;
    }
    for (runtime::Plan& plan : plan_of_each(prepared->plan)) ready.plans.push_back({std::move(plan), prepared->kernel, prepared->tables});
  }
  for (const std::string& remark : ready.engine.remarks) say({"cache_not_used", remark, "", Severity::remark});
  return ready;
}

bool Session::folder_is_fine(const ReadyExperiment& experiment) const {
  const auto judged = runtime::judge_folder(experiment.plans, options_);
  if (!judged) say({judged.error().kind, judged.error().message, judged.error().remedy});
  return judged.has_value();
}

void Session::pass_on(const runtime::Notice& notice) const {
  const Severity severity = notice.gravity == runtime::Gravity::error     ? Severity::error
                            : notice.gravity == runtime::Gravity::warning ? Severity::warning
                                                                          : Severity::remark;
  say({notice.kind, notice.text, notice.remedy, severity, notice.place});
}

/// Sets how many points go at a time: fewer than asked for where the memory is short.
bool Session::fits_the_memory(const ReadyExperiment& experiment) {
  constexpr double kGib = 1 << 30;
  options_.jobs = jobs_of(command_);
  const std::optional<double> available = runtime::memory_available();
  if (!available) return true;
  runtime::MemoryNeed need;
  for (const runtime::PlanAndKernel& each : experiment.plans) {
    const runtime::MemoryNeed one = runtime::memory_needed(each.plan, runtime::lanes_used(each.plan, each.kernel));
    if (one.common + one.each_job > need.common + need.each_job) need = one;
  }
  const std::size_t fitting = runtime::jobs_that_fit(need, options_.jobs, *available);
  if (fitting == options_.jobs) return true;
  const std::string amounts = fmt::format("a point of `{}` takes about {:.3g} GiB, {:.3g} GiB are free", experiment.name,
                                          (need.common + need.each_job) / kGib, *available / kGib);
  if (fitting == 0) {
    say({"memory_short", amounts, "use fewer qubits or `levels`, or a larger machine"});
    return false;
  }
  say({"fewer_jobs", fmt::format("{}: {} at a time instead of {}", amounts, fitting, options_.jobs), "", Severity::remark});
  options_.jobs = fitting;
  return true;
}

runtime::RunReport Session::run_with_progress(const ReadyExperiment& experiment) const {
  runtime::RunOptions options = options_;
  if (command_.time_limit) {
    const std::chrono::duration<double> used = std::chrono::steady_clock::now() - start_;
    options.time_limit = std::max(0.0, *command_.time_limit - used.count());
  }
  const ProgressLine progress(experiment.name, !command_.model.json_diagnostics);
  options.progress = [&](std::uint64_t done, std::uint64_t total, double left) { progress(done, total, left); };
  auto report = runtime::run_experiment(experiment.plans, options);
  if (report) return std::move(report).value();
  // The folder changed under our hands since it was judged.
  runtime::RunReport refused;
  refused.experiment = experiment.name;
  refused.any_plan = &experiment.plans.front().plan;
  refused.not_written = report.error();
  return refused;
}

int Session::run(const ReadyExperiment& experiment) {
  if (!fits_the_memory(experiment)) return kIncomplete;
  const runtime::RunReport report = run_with_progress(experiment);
  fmt::print("{}", runtime::summary(report));
  if (!report.not_written) fmt::print("results in {}\n", (*options_.out / experiment.name).string());
  std::fflush(stdout);
  for (const runtime::Notice& notice : runtime::notices_of(report)) pass_on(notice);
  if (command_.model.json_diagnostics) {
    for (const runtime::Notice& notice : runtime::failed_claims(report)) pass_on(notice);
  }
  if (command_.timings) {
    const std::string times =
        fmt::format("kernels: {} compiled, {} from the cache, {:.3f} s; points: {:.3f} s", experiment.engine.compiled,
                    experiment.engine.cache_hits, experiment.engine.seconds, report.seconds);
    if (command_.model.json_diagnostics) say({"timings", times, "", Severity::remark});
    else fmt::print(stderr, "{}\n", times);
  }
  return runtime::exit_status(report);
}

/// The graver of two exit statuses: 2, then 3, then 1, then 0.
int graver(int a, int b) {
  constexpr int kGravity[] = {0, 1, 3, 2};
  return kGravity[a] >= kGravity[b] ? a : b;
}

}  // namespace

int run_model(const RunCommand& command) {
  const auto model = load_model(command.model);
  if (!model) return kWrongInput;
  const auto chosen = choose_experiments(*model, command.model, command.experiment);
  if (!chosen) return kWrongInput;
  int status = chosen->complete ? kFine : kWrongInput;
  if (chosen->fitting.empty() && chosen->complete) {
    show({"nothing_to_run", "the model has no experiment", "`experiment NAME { ... }` says what is done with a chip"},
         command.model.json_diagnostics);
    return kWrongInput;
  }
  listen_for_stop();
  Session session(command, *model);
  std::vector<ReadyExperiment> ready;
  for (const ChosenExperiment& experiment : chosen->fitting) {
    auto prepared = session.prepare_experiment(experiment);
    if (prepared) ready.push_back(std::move(*prepared));
    else status = graver(status, kIncomplete);
  }
  bool refused = false;
  for (const ReadyExperiment& experiment : ready) refused |= !session.folder_is_fine(experiment);
  if (refused) return kWrongInput;
  for (const ReadyExperiment& experiment : ready) {
    status = graver(status, stop_requested != 0 ? kIncomplete : session.run(experiment));
  }
  return status;
}

}  // namespace tarn::compiler
