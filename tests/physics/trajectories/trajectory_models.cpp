#include "tests/physics/trajectories/trajectory_models.h"

#include <catch2/catch.hpp>
#include <map>
#include <tuple>

#include "tests/support/dense.h"

namespace tarn::runtime::testing {
namespace {

using Complex = std::complex<double>;
using Index = Eigen::Index;

constexpr double kCutoff = kTwoPi * 8;

Index dimension_of(const NoisyRun& run) { return Index{1} << run.family.qubits; }

Density start_of(const NoisyRun& run) {
  Density rho = Density::Zero(dimension_of(run), dimension_of(run));
  for (std::size_t k = 0; k < run.kets.size(); ++k) rho += run.weights[k] * projector(run.kets[k]);
  return rho;
}

}  // namespace

Timeline mixed_pace() { return {{{0, 2, 0, 0.6}, {2, 4.5, 0.6, 0.6}, {4.5, 6, 0.75, 1}}, 0, 1}; }

LabOperators lab_with_jumps(const NoisyRun& run) {
  LabOperators lab = lab_of(run.family);
  lab.jumps = run.jumps;
  return lab;
}

std::shared_ptr<const NoiseTable> operators_table(const NoisyRun& run, FastEquation equation, double eta, double window) {
  const auto model = dense_levels<double>(run.family);
  const ThermalBath bath = *ThermalBath::make({PowerLaw{eta, kCutoff, 1.0}}, kTheta);
  NoiseTableOptions options;
  options.equation = equation;
  options.keep_operators = true;
  // Making a bath takes longer than most tests.
  static std::map<std::tuple<FastEquation, double, double>, FastBath> made;
  FastBath& fast = made[{equation, eta, window}];
  if (!fast.pair) fast = fast_bath(equation, bath, 200, window);
  return NoiseTable::make<double>(model, std::vector<FastBath>(model.couplings, fast), options);
}

std::vector<BathFunctions> davies_baths(const NoisyRun& run, double eta) {
  return same_baths(run.family.couplings.size(), {ohmic_rate(eta, kCutoff, kTheta), smooth_shift(eta, kCutoff)});
}

Unravelling davies_unravelling(const NoisyRun& run, double eta, bool tabulated) {
  const auto model = dense_levels<double>(run.family);
  SmoothTable::Options options;
  options.breaks = {0, 1};
  const auto table = tabulated ? davies_drift<double>(model, davies_baths(run, eta), 1e-6, 0, options) : nullptr;
  return unravel_davies<double>(model, davies_baths(run, eta), 1e-6, 0, lab_with_jumps(run), false, table);
}

std::vector<Density> pauli_words(int qubits) {
  std::vector<Density> words;
  const std::uint64_t masks = std::uint64_t{1} << static_cast<unsigned>(qubits);
  for (std::uint64_t x = 0; x < masks; ++x)
    for (std::uint64_t z = 0; z < masks; ++z)
      if (x != 0 || z != 0) words.push_back(dense_matrix<Complex>({{1.0, PauliWord{x, z}}}, qubits));
  return words;
}

Eigen::MatrixXd readings_of(const Unravelling& model, const NoisyRun& run, std::size_t count, std::uint64_t seed, std::size_t jobs, double tolerance) {
  const std::vector<Density> words = pauli_words(run.family.qubits);
  Eigen::MatrixXd readings(static_cast<Index>(count), static_cast<Index>(words.size() * run.times.size()));
  TrajectoryRun task;
  task.timeline = &run.timeline;
  task.times = run.times;
  task.kets = run.kets;
  task.weights = run.weights;
  task.count = count;
  task.seed = seed;
  task.tolerance = tolerance;
  task.jobs = jobs;
  const auto done = propagate_trajectories(model, task, [&](std::size_t k, std::size_t i, const State& state) {
    const Ket& ket = std::get<Ket>(state);
    for (std::size_t w = 0; w < words.size(); ++w)
      readings(static_cast<Index>(i), static_cast<Index>(k * words.size() + w)) = ket.dot(words[w] * ket).real();
  }, {});
  REQUIRE(done);
  return readings;
}

Eigen::RowVectorXd readings_of(const std::vector<Density>& states, int qubits) {
  const std::vector<Density> words = pauli_words(qubits);
  Eigen::RowVectorXd readings(static_cast<Index>(words.size() * states.size()));
  Index at = 0;
  for (const Density& rho : states)
    for (const Density& word : words) readings[at++] = word.cwiseProduct(rho.transpose()).sum().real();
  return readings;
}

std::vector<Density> density_by_open(const NoisyRun& run, std::shared_ptr<const NoiseTable> table) {
  const LabOperators lab = lab_with_jumps(run);
  OpenGenerator generator(std::move(table), lab);
  std::vector<Density> states;
  const auto done = propagate_open(generator, {&run.timeline, {}, run.times, 1e-10}, start_of(run),
                                   [&](std::size_t, const State& state) { states.push_back(std::get<Density>(state)); }, {});
  REQUIRE(done);
  return states;
}

std::vector<Density> density_by_davies(const NoisyRun& run, double eta) {
  const auto track = std::make_shared<const Track<double>>(dense_levels<double>(run.family), TrackOptions{});
  const DaviesTables<double> tables(track, davies_baths(run, eta));
  DaviesRun task{run.timeline, start_of(run), run.times, {}, {}};
  for (const MatrixSum& jump : run.jumps) task.jumps.push_back({jump.matrices[0], 1.0});
  const auto refined = refine_to<double>(1e-7, tables, task);
  REQUIRE(refined);
  CHECK(refined->converged);
  return refined->states;
}

ChiSquare chi_square(const Eigen::MatrixXd& readings, const Eigen::RowVectorXd& expected) {
  const auto n = static_cast<double>(readings.rows());
  const Eigen::RowVectorXd mean = readings.colwise().mean();
  const Eigen::MatrixXd off = readings.rowwise() - mean;
  const Eigen::MatrixXcd centred = off.cast<Complex>();
  const Eigen::MatrixXcd covariance = test::product_of(centred.transpose(), centred) / (n * (n - 1));
  const auto [values, vectors] = test::dense_levels_of(covariance);
  const Eigen::VectorXd along = (vectors.adjoint() * (mean - expected).transpose().cast<Complex>()).real();
  ChiSquare sum;
  for (Index k = 0; k < values.size(); ++k) {
    if (values[k] * n < 0.01) continue;
    sum.value += along[k] * along[k] / values[k];
    ++sum.freedom;
  }
  return sum;
}

}  // namespace tarn::runtime::testing
