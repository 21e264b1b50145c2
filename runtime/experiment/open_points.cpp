#include "runtime/experiment/open_points.h"

#include <fmt/format.h>

#include <algorithm>
#include <cmath>
#include <complex>
#include <numbers>

#include "runtime/equation/propagate_open.h"
#include "runtime/experiment/bath_of_plan.h"
#include "runtime/experiment/noise_of_point.h"
#include "runtime/experiment/words.h"
#include "runtime/linear/eigensystem.h"

namespace tarn::runtime {
namespace {

using Complex = std::complex<double>;

FastEquation fast_equation(Equation equation) {
  if (equation == Equation::redfield || equation == Equation::lindblad) return FastEquation::redfield;
  return equation == Equation::universal ? FastEquation::universal : FastEquation::coarse_grained;
}

/// A window makes some width x window / pi jump operators of every bath, which change along s as fast: beyond
/// this phase [rad] tables no longer fit.
constexpr double kMostTurnsOfWindow = 1500;

RunError window_too_long(const Plan& plan, double window, double width) {
  return {"window_too_long",
          fmt::format("a window of {:.4g} ns is too long for levels {:.4g} GHz apart: up to {:.3g} ns can be tabulated; such a window averages as `davies` does",
                      window, width / (2 * std::numbers::pi), 2 * kMostTurnsOfWindow / width),
          plan.choice.place};
}

struct Request {
  const Plan& plan;
  const NoiseOperators& noise;
  const ThermalBaths& baths;
  const RangeOfS& range;
  std::span<const double> windows;  ///< Of every noise operator [ns], where the equation averages.
  const PointTask& task;
  bool grows;                       ///< Coefficients are integrated up to t.
  double width;                     ///< Bohr frequencies stay below it [rad/ns].
  const Interrupted& interrupted;
};

template <class Scalar>
Result<std::shared_ptr<const NoiseTable>, RunError> make_table(const HamiltonianFamily& family, const Request& request) {
  const Plan& plan = request.plan;
  const LevelModel<Scalar> model = dense_levels<Scalar>(family);
  const double width = request.width;
  for (const double window : request.windows) {
    if (!(0.5 * width * window < kMostTurnsOfWindow)) return Unexpected{window_too_long(plan, window, width)};
  }
  EquationChoice choice = plan.choice;
  if (!request.grows) choice.memory = Memory::markov;
  NoiseTableOptions options;
  options.equation = fast_equation(plan.choice.equation);
  options.shift = plan.choice.lamb_shift;
  options.s_min = request.range.lowest;
  options.s_max = request.range.highest;
  if (plan.levels) options.levels = static_cast<Eigen::Index>(*plan.levels);
  if (request.grows) {
    options.along = &request.task.timeline();
    options.breaks = request.task.breaks();
  }
  options.interrupted = request.interrupted;
  auto table = NoiseTable::make<Scalar>(model, fast_noise_of(choice, request.noise, request.baths, width,
                                                              request.task.timeline().duration(), request.windows), options);
  if (!table) return Unexpected{RunError{"interrupted", "stopped before the end", {}}};
  return table;
}

}  // namespace

bool runs_on_noise_table(const EquationChoice& choice) {
  return (choice.equation == Equation::redfield && choice.memory != Memory::driven) ||
         choice.equation == Equation::coarse_grained || choice.equation == Equation::universal;
}

Result<OpenPoints::Table, RunError> OpenPoints::table_for(PointTask& task, bool standing, const Interrupted& interrupted) {
  const Plan& plan = model_.plan();
  const std::shared_ptr<const Functions> functions = functions_of(task);
  if (!finite_levels(plan, *functions)) {
    return Unexpected{RunError{"not_finite", "a coefficient of the Hamiltonian or of a noise operator is not finite"}};
  }
  // A scan has no pace: it stands at one s after the other.
  const RangeOfS range = plan.scan ? RangeOfS{0, 1} : followed_range(task.timeline());
  std::vector<double> key = levels_key(plan, *functions, task.settings());
  key.insert(key.end(), {range.lowest, range.highest});
  for (std::uint32_t b = 0; b < plan.chip.baths.size(); ++b) {
    const std::vector<double> more = bath_fingerprint(plan, b, task.settings(), *functions);
    key.insert(key.end(), more.begin(), more.end());
  }
  // `lindblad` knows no bath.
  const bool bare = plan.choice.equation == Equation::lindblad;
  const auto noise = bare ? Result<NoiseOperators, RunError>(NoiseOperators{}) : independent_noise(plan, task.settings());
  if (!noise) return Unexpected{noise.error()};
  const auto baths = bare ? Result<ThermalBaths, RunError>(ThermalBaths{}) : fast_baths(plan, task.settings(), functions);
  if (!baths) return Unexpected{baths.error()};
  const auto windows = windows_of(plan, *noise, *baths, *functions, range, task);
  if (!windows) return Unexpected{windows.error()};
  key.insert(key.end(), windows->begin(), windows->end());
  const bool grows = plan.choice.memory == Memory::growing && !standing;
  const auto make = [&]() -> Result<Table, RunError> {
    const HamiltonianFamily family = family_of(model_, functions, *noise, task.positions());
    const Request request{plan, *noise, *baths, range, *windows, task, grows, frequency_bound(model_, *functions, range), interrupted};
    return is_real(family) ? make_table<double>(family, request) : make_table<Complex>(family, request);
  };
  // Coefficients that grow with t belong to one run.
  return grows ? make() : tables_.get(key, make);
}

Result<Eigen::MatrixXcd, RunError> OpenPoints::map_at(PointTask& task, double s, const Interrupted& interrupted) {
  const auto table = table_for(task, true, interrupted);
  if (!table) return Unexpected{table.error()};
  const LabOperators lab = lab_operators(model_, functions_of(task));
  OpenGenerator generator(*table, lab);
  const double t = 0;
  if (!generator.prepare({&s, 1}, {&t, 1}).front()) return Unexpected{RunError{"not_finite", "a coefficient is not finite here"}};
  return generator.dense(0);
}

Result<Mode, RunError> OpenPoints::mode(PointTask& task, double s, std::optional<LevelPair> pair, const Interrupted& interrupted) {
  const auto map = map_at(task, s, interrupted);
  if (!map) return Unexpected{map.error()};
  const std::shared_ptr<const Functions> functions = functions_of(task);
  const Eigen::MatrixXcd h = dense_operator(scaled_words(model_.plan().chip.hamiltonian, functions->values(kCoefficients, s, 0)), model_.plan().chip.qubits.size());
  const Eigen::MatrixXcd v = eigensystem(h).vectors;
  if (pair && std::max(pair->row, pair->column) >= v.cols()) return Unexpected{RunError{"no_such_level", "the chip has fewer levels"}};
  const Eigen::MatrixXcd x = pair ? Eigen::MatrixXcd(v.col(pair->row) * v.col(pair->column).adjoint())
                                  : Eigen::MatrixXcd(v.col(1) * v.col(1).adjoint() - v.col(0) * v.col(0).adjoint());
  const auto mode = leading_mode(*map, x.reshaped());
  if (!mode) return Unexpected{no_modes()};
  return *mode;
}

Result<Density, RunError> OpenPoints::steady(PointTask& task, double s, const Interrupted& interrupted) {
  const auto map = map_at(task, s, interrupted);
  if (!map) return Unexpected{map.error()};
  const auto state = stationary_state(*map);
  if (!state) return Unexpected{no_steady_state()};
  return *state;
}

void OpenPoints::advance(PointTask& task, const Interrupted& interrupted) {
  if (!task.wants_run()) return;
  const bool stands = task.timeline().segments.empty();
  Table table;
  if (!stands) {
    const auto made = table_for(task, false, interrupted);
    if (!made) return task.fail(made.error());
    table = *made;
    if (!table->resolved()) task.remark("the generator changes too fast along s to be tabulated; answers are marked by their errors at best");
  }
  const Density initial = density_of(task.begin());
  if (stands) {
    task.begin_run();
    for (std::size_t k = 0; k < task.times().size(); ++k) task.visit(k, initial, 1);
    return task.end_best_run({}, {}, true);
  }
  const LabOperators lab = lab_operators(model_, functions_of(task));
  OpenGenerator generator(table, lab);
  task.note_floor(table->error() * task.timeline().duration());
  while (task.wants_run()) {
    task.begin_run();
    const OpenRun run{&task.timeline(), task.breaks(), task.times(), task.tolerance(), model_.reads_t()};
    const auto counters = propagate_open(generator, run, initial, [&](std::size_t index, const State& state) { task.visit(index, state, 1); }, interrupted);
    if (!counters) return task.fail(counters.error());
    task.end_run(*counters);
  }
}

}  // namespace tarn::runtime
