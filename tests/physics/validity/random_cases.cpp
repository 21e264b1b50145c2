#include "random_cases.h"

#include <algorithm>
#include <chrono>
#include <cmath>
#include <fmt/format.h>
#include <random>

#include "runtime/bath/exponential_sum.h"
#include "runtime/equation/davies_modes.h"
#include "runtime/equation/hierarchy.h"
#include "runtime/equation/hierarchy_steady.h"
#include "runtime/generator/stationary.h"
#include "runtime/linear/general.h"
#include "runtime/validity/secular.h"
#include "runtime/validity/window.h"
#include "tests/physics/open/open_models.h"
#include "tests/support/dense.h"

namespace tarn::runtime::testing {
namespace {

using Complex = std::complex<double>;
using Matrices = std::vector<Eigen::MatrixXcd>;

class Dice {
 public:
  explicit Dice(unsigned seed) : engine_(seed) {}
  double flat(double a, double b) { return a + (b - a) * std::uniform_real_distribution<double>()(engine_); }
  double decades(double a, double b) { return a * std::pow(b / a, flat(0, 1)); }
  bool one_in(int n) { return flat(0, n) < 1; }

 private:
  std::mt19937 engine_;
};

BathTimes times_of(const ThermalBath& bath, double run_length) { return *bath_times(bath, run_length); }

double norm_of(const Eigen::MatrixXcd& hermitian) {
  const auto levels = tarn::test::dense_levels_of(hermitian);
  return 0.5 * (levels.energies[levels.energies.size() - 1] - levels.energies[0]);
}

Eigen::MatrixXcd matrix_of(const OperatorSum& sum, const HamiltonianFamily& family, const CoefficientFunction& rows, double s) {
  std::vector<double> row(family.rows);
  rows({&s, 1}, row.data());
  const Eigen::Index n = Eigen::Index{1} << family.qubits;
  Eigen::MatrixXcd total = Eigen::MatrixXcd::Zero(n, n);
  for (const auto& group : sum.groups) total += row[group.coefficient] * dense_matrix<Complex>(group.terms, family.qubits);
  return total;
}

/// The largest difference of two levels along s.
double spectral_width(const HamiltonianFamily& family) {
  double width = 0;
  for (const double s : {0.0, 0.25, 0.5, 0.75, 1.0}) width = std::max(width, 2 * norm_of(matrix_of(family.hamiltonian, family, family.coefficients, s)));
  return width;
}

double window_of(const RandomCase& one, std::size_t c) {
  const BathTimes times = times_of(one.baths[c], one.run_length);
  const double norm = norm_of(matrix_of(one.family.couplings[c], one.family, one.family.coefficients, 0));
  return std::sqrt(times.tau_sb / (norm * norm) * times.tau_b);
}

FastEquation fast_equation(Equation equation) {
  if (equation == Equation::redfield) return FastEquation::redfield;
  return equation == Equation::universal ? FastEquation::universal : FastEquation::coarse_grained;
}

std::shared_ptr<const NoiseTable> noise_table(const RandomCase& one, const LevelModel<double>& model, Equation equation, double factor) {
  const double width = 1.1 * spectral_width(one.family);
  std::vector<FastBath> baths;
  for (std::size_t c = 0; c < one.baths.size(); ++c)
    baths.push_back(fast_bath(fast_equation(equation), one.baths[c], width, equation == Equation::coarse_grained ? factor * window_of(one, c) : 0));
  NoiseTableOptions options;
  options.equation = fast_equation(equation);
  options.tolerance = 1e-7;
  return NoiseTable::make<double>(model, std::move(baths), options);
}

std::vector<BathFunctions> davies_baths(const RandomCase& one) {
  std::vector<BathFunctions> baths;
  for (const ThermalBath& bath : one.baths) {
    const auto shift = std::make_shared<const ShiftFunction>(bath);
    const auto shared = std::make_shared<const ThermalBath>(bath);
    const auto array = [](std::span<const double> w) { return Eigen::Map<const Eigen::ArrayXd>(w.data(), static_cast<Eigen::Index>(w.size())); };
    BathFunctions made;
    made.rate = [=](std::span<const double> w, double* out) { Eigen::Map<Eigen::ArrayXd>(out, static_cast<Eigen::Index>(w.size())) = shared->rate(array(w)); };
    made.shift = [=](std::span<const double> w, double* out) { Eigen::Map<Eigen::ArrayXd>(out, static_cast<Eigen::Index>(w.size())) = (*shift)(array(w)); };
    baths.push_back(std::move(made));
  }
  return baths;
}

std::optional<std::vector<Density>> davies_answers(const RandomCase& one, const LevelModel<double>& model) {
  if (one.times.empty()) {
    const auto frame = model.solve(0, model.dimension);
    const auto groups = frequency_groups(frame.energies, 1e-8 * (frame.energies[model.dimension - 1] - frame.energies[0]));
    const auto baths = davies_baths(one);
    const auto state = stationary_state(davies_table<double>(model, frame, groups, baths), frame.energies);
    if (!state) return std::nullopt;
    const Eigen::MatrixXcd v = frame.vectors.cast<Complex>();
    return std::vector<Density>{Density(v * *state * v.adjoint())};
  }
  const auto track = std::make_shared<const Track<double>>(model, TrackOptions{});
  const DaviesTables<double> tables(track, davies_baths(one));
  const auto refined = refine_to<double>(1e-4, tables, {one.timeline, one.initial, one.times, {}, {}});
  if (!refined) return std::nullopt;
  return refined->states;
}

Eigen::MatrixXcd generator_map(const RandomCase& one, const std::shared_ptr<const NoiseTable>& table, double s) { return map_of(one.family, table, s); }

/// Davies' generator in the computational basis is not kept as a matrix: made from what it does to each unit matrix.
Eigen::MatrixXcd davies_map(const DaviesTable& table, const Eigen::VectorXd& energies) {
  const Eigen::Index n = energies.size();
  Eigen::MatrixXcd map(n * n, n * n);
  for (Eigen::Index k = 0; k < n * n; ++k) {
    Eigen::MatrixXcd unit = Eigen::MatrixXcd::Zero(n, n), out = Eigen::MatrixXcd::Zero(n, n);
    unit.data()[k] = 1;
    add_dissipator(table, unit, out);
    out.data()[k] -= Complex(0, energies[k % n] - energies[k / n]);
    map.col(k) = out.reshaped();
  }
  return map;
}

OpenSystem open_system(const RandomCase& one) {
  OpenSystem system;
  system.dimension = Eigen::Index{1} << one.family.qubits;
  const auto hamiltonian = dense_hamiltonian<Complex>(one.family);
  system.hamiltonian = [hamiltonian](double s, double, Eigen::MatrixXcd& h) { h = hamiltonian(s); };
  const double width = spectral_width(one.family);
  for (std::size_t c = 0; c < one.baths.size(); ++c) {
    const Eigen::MatrixXcd a = matrix_of(one.family.couplings[c], one.family, one.family.coefficients, 0);
    system.couplings.push_back({[a](double, Eigen::MatrixXcd& out) { out = a; }, true});
    // What the sums miss of Gamma; it has to be small against what the equations miss.
    system.baths.push_back(*exponential_sum(one.baths[c], 1e-3, std::min(one.run_length, 100.0), 2 * width));
  }
  return system;
}

Density level_projector(const RandomCase& one, Eigen::Index level) {
  const auto frame = dense_levels<double>(one.family).solve(0, Eigen::Index{1} << one.family.qubits);
  return projector(frame.vectors.col(level).cast<Complex>());
}

Density random_start(const RandomCase& one, Dice& dice) {
  const Eigen::Index n = Eigen::Index{1} << one.family.qubits;
  switch (static_cast<int>(dice.flat(0, 4))) {
    case 0: return level_projector(one, 0);
    case 1: return level_projector(one, n - 1);
    case 2: return Density::Constant(n, n, 1.0 / static_cast<double>(n));
    default: break;
  }
  Density first = Density::Zero(n, n);
  first(0, 0) = 1;
  return first;
}

ThermalBath random_bath(Dice& dice, double eta) {
  const double cutoff = dice.decades(4, 60), theta = dice.decades(0.6, 6);
  if (dice.one_in(2)) return *ThermalBath::make({Drude{eta, cutoff}}, theta);
  return *ThermalBath::make({PowerLaw{eta, cutoff, 1.0}}, theta);
}

/// H = -A(s)/2 sum g X + B(s)/2 (sum h Z + J ZZ), A and B linear in s or constant; noise cos Z + sin X.
HamiltonianFamily random_family(Dice& dice, int qubits, bool ramped) {
  const double a0 = dice.decades(0.4, 15), b0 = dice.flat(-15, 15);
  const double a1 = ramped ? dice.decades(0.4, 15) : a0, b1 = ramped ? dice.flat(-15, 15) : b0;
  const Schedules schedules{[=](double s) { return a0 + (a1 - a0) * s; }, [=](double) { return a1 - a0; },
                            [=](double s) { return b0 + (b1 - b0) * s; }, [=](double) { return b1 - b0; }};
  std::vector<double> h, g;
  for (int i = 0; i < qubits; ++i) {
    h.push_back(qubits == 1 ? 1.0 : dice.flat(-1, 1));
    g.push_back(qubits == 1 ? 1.0 : dice.flat(0.6, 1.4));
  }
  HamiltonianFamily family = ising(qubits, schedules, h, qubits == 1 ? std::vector<Bond>{} : std::vector<Bond>{{0, 1, dice.flat(-1, 1)}}, g);
  if (dice.one_in(3)) {
    family.couplings.clear();
    for (int i = 0; i < qubits; ++i) {
      const double angle = dice.flat(0, std::numbers::pi);
      family.couplings.push_back({{{2, {{std::cos(angle), word_z(qubits, i)}, {std::sin(angle), word_x(qubits, i)}}}}});
    }
  }
  return family;
}

}  // namespace

RandomCase random_case(unsigned seed) {
  Dice dice(seed);
  RandomCase one;
  one.seed = seed;
  const int qubits = dice.one_in(3) ? 2 : 1;
  const bool ramped = dice.one_in(2), stationary = !ramped && dice.one_in(2);
  one.family = random_family(dice, qubits, ramped);
  const double eta = dice.decades(1e-5, 0.2);
  for (int i = 0; i < qubits; ++i) one.baths.push_back(random_bath(dice, eta * (i == 0 ? 1 : dice.flat(0.3, 1))));
  const double length = ramped ? dice.decades(0.3, 20) : dice.decades(2, qubits == 1 ? 60 : 20);
  if (stationary) {
    double longest = 0;
    for (const ThermalBath& bath : one.baths) longest = std::max(longest, times_of(bath, 1).tau_sb);
    one.run_length = 10 * longest;
  } else {
    one.timeline = ramped ? ramp(length) : ramp(length, 0, 0);
    for (int k = 1; k <= 8; ++k) one.times.push_back(length * k / 8);
    one.run_length = length;
  }
  one.initial = random_start(one, dice);
  one.text = fmt::format("{} qubits, {}, eta {:.2g}, theta {:.2g}, length {:.3g}", qubits, ramped ? "ramp" : stationary ? "stationary" : "hold",
                         eta, one.baths[0].theta(), one.run_length);
  return one;
}

std::optional<std::vector<Density>> answers(const RandomCase& one, Equation equation, double window_factor) {
  const auto model = dense_levels<double>(one.family);
  if (equation == Equation::davies) return davies_answers(one, model);
  const auto table = noise_table(one, model, equation, window_factor);
  if (one.times.empty()) {
    const auto state = stationary_state(generator_map(one, table, 0));
    if (!state) return std::nullopt;
    return std::vector<Density>{*state};
  }
  const LabOperators lab = lab_of(one.family);
  OpenGenerator generator(table, lab);
  std::vector<Density> states(one.times.size());
  const OpenRun run{&one.timeline, {}, one.times, 1e-6};
  const auto made = propagate_open(generator, run, one.initial, [&](std::size_t k, const State& state) { states[k] = std::get<Density>(state); }, {});
  if (!made) return std::nullopt;
  return states;
}

std::optional<std::vector<Density>> exact_answers(const RandomCase& one, double accuracy, double seconds) {
  using Clock = std::chrono::steady_clock;
  const auto start = Clock::now();
  const Interrupted late = [&] { return std::chrono::duration<double>(Clock::now() - start).count() > seconds; };
  const OpenSystem system = open_system(one);
  const std::size_t modes = hierarchy_modes(system.baths).size();
  std::optional<std::vector<Density>> last;
  for (int depth = 2; hierarchy_count(modes, depth) < 2e4; ++depth) {
    std::vector<Density> states(std::max<std::size_t>(1, one.times.size()));
    if (one.times.empty()) {
      const auto found = stationary_hierarchy(system, depth, 0, 1e-5, late);
      if (!found) return std::nullopt;
      states[0] = found->rho;
    } else {
      const MemoryRun run{&one.timeline, {}, one.times, 1e-6};
      const auto made = propagate_hierarchy(system, depth, run, one.initial, [&](std::size_t k, const State& state) { states[k] = std::get<Density>(state); }, late);
      if (!made) return std::nullopt;
    }
    double moved = std::numeric_limits<double>::infinity();
    if (last) {
      moved = 0;
      for (std::size_t k = 0; k < states.size(); ++k) moved = std::max(moved, (states[k] - (*last)[k]).cwiseAbs().maxCoeff());
    }
    last = std::move(states);
    if (moved < accuracy) return last;
  }
  return std::nullopt;
}

double largest_difference(const RandomCase& one, const std::vector<Density>& a, const std::vector<Density>& b) {
  double largest = 0;
  const auto model = dense_levels<double>(one.family);
  for (std::size_t k = 0; k < a.size(); ++k) {
    const Eigen::MatrixXcd off = a[k] - b[k];
    const bool moves = !one.times.empty() && one.timeline.segments[0].s1 != one.timeline.segments[0].s0;
    const Eigen::MatrixXcd v = model.solve(moves ? one.times[k] / one.run_length : 0, model.dimension).vectors.cast<Complex>();
    const Eigen::MatrixXcd turned = v.adjoint() * off * v;
    for (const Eigen::MatrixXcd& m : {off, turned})
      for (Eigen::Index i = 0; i < m.rows(); ++i)
        largest = std::isfinite(m(i, i).real()) ? std::max(largest, std::abs(m(i, i).real())) : std::numeric_limits<double>::infinity();
  }
  return largest;
}

std::vector<ValidityInput> inputs_along(const RandomCase& one, Equation equation, std::size_t count) {
  const auto model = dense_levels<double>(one.family);
  const bool moves = !one.times.empty() && one.timeline.segments[0].s1 != one.timeline.segments[0].s0;
  const auto table = equation == Equation::davies ? nullptr : noise_table(one, model, equation, 1);
  const auto baths = davies_baths(one);
  std::vector<std::function<void(std::span<const double>, double*)>> rates, averaged;
  ValidityInput common;
  common.equation = equation;
  for (std::size_t c = 0; c < one.baths.size(); ++c) {
    NoiseScale noise;
    noise.norm = norm_of(matrix_of(one.family.couplings[c], one.family, one.family.coefficients, 0));
    noise.times = times_of(one.baths[c], one.run_length);
    rates.push_back(baths[c].rate);
    if (equation == Equation::coarse_grained) {
      noise.window = window_of(one, c);
      const auto pair = fast_bath(FastEquation::coarse_grained, one.baths[c], 1.1 * spectral_width(one.family), noise.window).pair;
      averaged.push_back([pair](std::span<const double> w, double* out) {
        for (std::size_t k = 0; k < w.size(); ++k) out[k] = pair->rate(w[k], w[k]);
      });
    }
    common.noises.push_back(noise);
  }
  std::vector<ValidityInput> inputs;
  for (std::size_t k = 0; k < (moves ? count : 1); ++k) {
    ValidityInput input = common;
    input.s = moves ? static_cast<double>(k) / static_cast<double>(count - 1) : 0;
    input.t = moves ? input.s * one.run_length : 0;
    input.drive = moves ? norm_of(matrix_of(one.family.hamiltonian, one.family, one.family.derivative, input.s)) / one.run_length : 0;
    const auto frame = model.solve(input.s, model.dimension);
    input.energies = frame.energies;
    Matrices elements;
    for (std::size_t c = 0; c < one.baths.size(); ++c) elements.push_back(coupling_elements(model, c, frame).cast<Complex>());
    const double tolerance = 1e-8 * spectral_width(one.family);
    const Eigen::MatrixXcd map = table ? generator_map(one, table, input.s)
                                       : davies_map(davies_table<double>(model, frame, frequency_groups(frame.energies, tolerance), baths), frame.energies);
    const Eigen::MatrixXcd v = table ? Eigen::MatrixXcd(frame.vectors.cast<Complex>()) : Eigen::MatrixXcd::Identity(map.rows() == 4 ? 2 : 4, map.rows() == 4 ? 2 : 4);
    const Density relaxing = v.col(1) * v.col(1).adjoint() - v.col(0) * v.col(0).adjoint(), turning = v.col(0) * v.col(1).adjoint();
    if (const auto mode = leading_mode(map, relaxing.reshaped())) input.t1 = 1 / mode->rate;
    if (const auto mode = leading_mode(map, turning.reshaped())) input.t2 = 1 / mode->rate;
    if (const auto modes = general_eigensystem(map)) input.largest_rate = std::max(0.0, -modes->values.real().minCoeff());
    input.secular = secular_ratio(frame.energies, elements, rates, tolerance).ratio;
    if (!averaged.empty()) input.heating = window_heating(frame.energies, elements, rates, averaged);
    inputs.push_back(std::move(input));
  }
  return inputs;
}

std::optional<std::vector<CaseVerdict>> judged_case(const RandomCase& one, double accuracy, double seconds) {
  const auto exact = exact_answers(one, accuracy, seconds);
  if (!exact) return std::nullopt;
  std::vector<CaseVerdict> verdicts;
  for (const Equation equation : {Equation::redfield, Equation::davies, Equation::coarse_grained, Equation::universal}) {
    CaseVerdict verdict;
    verdict.equation = equation;
    const auto found = answers(one, equation);
    verdict.error = found ? largest_difference(one, *found, *exact) : std::numeric_limits<double>::infinity();
    std::vector<ValidityJudgement> run;
    for (const ValidityInput& input : inputs_along(one, equation, 11)) run.push_back(judge(input));
    verdict.validity = run_validity(run);
    verdict.ratios.assign(run[0].conditions.size(), 0.0);
    for (const ValidityJudgement& judgement : run)
      for (std::size_t k = 0; k < verdict.ratios.size(); ++k) verdict.ratios[k] = std::max(verdict.ratios[k], judgement.conditions[k].ratio);
    verdicts.push_back(std::move(verdict));
  }
  return verdicts;
}

}  // namespace tarn::runtime::testing
