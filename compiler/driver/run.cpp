#include "runtime/experiment/run.h"

#include <fmt/format.h>
#include <unistd.h>

#include <atomic>
#include <csignal>
#include <cstdio>
#include <filesystem>
#include <thread>

#include "compiler/driver/commands.h"
#include "compiler/driver/model.h"
#include "compiler/driver/prepare.h"
#include "compiler/jit/digest.h"
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
  explicit ProgressLine(std::string experiment) : experiment_(std::move(experiment)), shown_(isatty(STDERR_FILENO) != 0) {}
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

runtime::Provenance provenance_of(const SourceSet& sources) {
  runtime::Provenance provenance;
  provenance.version = TARN_VERSION;
  for (std::uint32_t file = 0; file < sources.size(); ++file) {
    const SourceFile& source = sources.file(FileId{file});
    provenance.texts.push_back({source.name, to_hex(sha256(source.text))});
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

int complain(const std::string& message, int status) {
  fmt::print(stderr, "tarn: error: {}\n", message);
  return status;
}

Result<std::vector<runtime::PlanAndKernel>, CompileError> prepare_all(const ChosenExperiment& experiment,
                                                                      const SourceSet& sources,
                                                                      const RunCommand& command,
                                                                      EngineReport& report) {
  std::vector<runtime::PlanAndKernel> plans;
  for (const Instance& instance : experiment.instances) {
    auto prepared = prepare(instance, sources, {.cache = command.compile.cache}, report);
    if (!prepared) return Unexpected{prepared.error()};
    plans.push_back({std::move(prepared->plan), prepared->kernel, std::move(prepared->tables)});
  }
  return plans;
}

void show_timings(const EngineReport& engine, const runtime::RunReport& run) {
  fmt::print(stderr, "kernels: {} compiled, {} from the cache, {:.3f} s; points: {:.3f} s\n", engine.compiled,
             engine.cache_hits, engine.seconds, run.seconds);
}

int run_one(const ChosenExperiment& experiment, const LoadedModel& model, const RunCommand& command,
            double seconds_left) {
  EngineReport engine;
  const auto plans = prepare_all(experiment, model.program.sources(), command, engine);
  for (const std::string& remark : engine.remarks) fmt::print(stderr, "tarn: remark: {}\n", remark);
  if (!plans) return complain(plans.error().message, kIncomplete);
  runtime::RunOptions options;
  options.jobs = jobs_of(command);
  options.sample = command.sample;
  options.out = results_folder(command);
  options.interrupted = [] { return stop_requested != 0; };
  options.provenance = provenance_of(model.program.sources());
  if (command.time_limit) options.time_limit = seconds_left;
  const auto report = [&] {
    const ProgressLine progress(experiment.name);
    options.progress = [&](std::uint64_t done, std::uint64_t total, double left) { progress(done, total, left); };
    return runtime::run_experiment(*plans, options);
  }();
  if (!report) return complain(report.error().message, kWrongInput);
  fmt::print("{}", runtime::summary(*report));
  fmt::print("results in {}\n", (*options.out / experiment.name).string());
  if (command.timings) show_timings(engine, *report);
  return runtime::exit_status(*report);
}

/// The graver of two exit statuses: 2, then 3, then 1, then 0.
int graver(int a, int b) {
  constexpr int kGravity[] = {0, 1, 3, 2};
  return kGravity[a] >= kGravity[b] ? a : b;
}

}  // namespace

int run_model(const RunCommand& command) {
  const auto start = std::chrono::steady_clock::now();
  const auto model = load_model(command.model);
  if (!model) return kWrongInput;
  const auto chosen = choose_experiments(*model, command.model, command.experiment);
  if (!chosen) return kWrongInput;
  if (chosen->empty()) return complain("the model has no experiment to run", kWrongInput);
  listen_for_stop();
  int status = kFine;
  for (const ChosenExperiment& experiment : *chosen) {
    const std::chrono::duration<double> used = std::chrono::steady_clock::now() - start;
    const double left = std::max(0.0, command.time_limit.value_or(0) - used.count());
    status = graver(status, run_one(experiment, *model, command, left));
    if (stop_requested != 0) break;
  }
  return status;
}

}  // namespace tarn::compiler
