#include "runtime/experiment/chip_family.h"

#include <fmt/format.h>

#include <algorithm>
#include <cmath>
#include <map>
#include <set>

#include "runtime/experiment/words.h"
#include "runtime/linear/eigensystem.h"

namespace tarn::runtime {
namespace {

constexpr std::size_t kSampledPositions = 257;
constexpr double kNarrowest = 0.02;
constexpr double kRoundingOfCorrelation = 1e-10;

/// Rows of the coefficients of H and of the noise operators.
std::set<std::uint32_t> rows_of_levels(const Plan& plan) {
  std::set<std::uint32_t> rows;
  const auto collect = [&](const OperatorSum& sum) {
    for (const OperatorGroup& group : sum.groups) rows.insert(group.coefficient);
  };
  collect(plan.chip.hamiltonian);
  for (const Coupling& coupling : plan.chip.couplings) collect(coupling.op);
  return rows;
}

/// sum_a factors[a] A_a.
OperatorSum combined(std::span<const Coupling> couplings, const Eigen::VectorXd& factors) {
  std::map<std::uint32_t, OperatorGroup> groups;
  for (std::size_t a = 0; a < couplings.size(); ++a) {
    const double factor = factors[static_cast<Eigen::Index>(a)];
    if (factor == 0) continue;
    for (const OperatorGroup& group : couplings[a].op.groups) {
      OperatorGroup& sum = groups[group.coefficient];
      sum.coefficient = group.coefficient;
      for (WordTerm term : group.terms) {
        term.factor *= factor;
        sum.terms.push_back(term);
      }
    }
  }
  OperatorSum result;
  for (auto& [row, group] : groups) result.groups.push_back(std::move(group));
  return result;
}

Result<Eigen::MatrixXd, RunError> correlation_matrix(const Correlation& correlation, std::span<const double> settings) {
  const auto n = static_cast<Eigen::Index>(correlation.count);
  Eigen::MatrixXd c(n, n);
  for (Eigen::Index i = 0; i < n; ++i)
    for (Eigen::Index j = 0; j < n; ++j) c(i, j) = settings[correlation.elements[static_cast<std::size_t>(i * n + j)]];
  const auto bad = [&](std::string text) { return Unexpected{RunError{"bad_correlation", std::move(text), correlation.place}}; };
  if (!c.allFinite()) return bad("the correlation of two copies is not finite here");
  for (Eigen::Index i = 0; i < n; ++i) {
    if (std::abs(c(i, i) - 1) > kRoundingOfCorrelation) {
      return bad(fmt::format("correlation(i, j) is {:.6g} at i = j = {}; a copy's correlation with itself is 1", c(i, i), i));
    }
    for (Eigen::Index j = 0; j < i; ++j) {
      if (std::abs(c(i, j) - c(j, i)) > kRoundingOfCorrelation) {
        return bad(fmt::format("correlation(i, j) is {:.6g} at ({}, {}) but {:.6g} at ({}, {}); it must be symmetric", c(j, i), j, i, c(i, j), i, j));
      }
    }
  }
  return c;
}

void write_dense(const OperatorSum& sum, std::size_t qubits, MatrixSum& out) {
  for (const OperatorGroup& group : sum.groups) {
    out.rows.push_back(group.coefficient);
    out.matrices.push_back(dense_operator(group.terms, qubits));
  }
}

}  // namespace

std::vector<double> sampled_positions() {
  std::vector<double> s(kSampledPositions);
  for (std::size_t i = 0; i < kSampledPositions; ++i) s[i] = static_cast<double>(i) / (kSampledPositions - 1);
  return s;
}

Result<NoiseOperators, RunError> independent_noise(const Plan& plan, std::span<const double> settings) {
  NoiseOperators noise;
  std::size_t next = 0;
  const auto take_until = [&](std::size_t end) {
    for (; next < end; ++next) {
      noise.ops.push_back(plan.chip.couplings[next].op);
      noise.bath.push_back(plan.chip.couplings[next].bath);
    }
  };
  for (const Correlation& correlation : plan.chip.correlations) {
    take_until(correlation.first);
    const auto c = correlation_matrix(correlation, settings);
    if (!c) return Unexpected{c.error()};
    const Eigensystem<double> modes = eigensystem(*c);
    if (!modes.converged || modes.values[0] < -kRoundingOfCorrelation) {
      return Unexpected{RunError{"bad_correlation", fmt::format("the correlations have the negative eigenvalue {:.6g}, which no noise has", modes.values[0]), correlation.place}};
    }
    const std::span copies(plan.chip.couplings.data() + correlation.first, correlation.count);
    for (Eigen::Index k = 0; k < modes.values.size(); ++k) {
      if (modes.values[k] <= kRoundingOfCorrelation) continue;
      noise.ops.push_back(combined(copies, std::sqrt(modes.values[k]) * modes.vectors.col(k)));
      noise.bath.push_back(copies.front().bath);
    }
    next += correlation.count;
  }
  take_until(plan.chip.couplings.size());
  return noise;
}

std::shared_ptr<const Functions> functions_of(const PointTask& task) {
  auto functions = std::make_shared<Functions>(task.model().kernel(), task.model().tables(), task.model().plan());
  for (std::uint32_t i = 0; i < task.model().kernel().inputs(); ++i) functions->set_input(i, task.input(i));
  return functions;
}

HamiltonianFamily family_of(const PlanModel& model, std::shared_ptr<const Functions> functions,
                            const NoiseOperators& noise, std::span<const double> kinks) {
  const Chip& chip = model.plan().chip;
  HamiltonianFamily family;
  family.qubits = static_cast<int>(chip.qubits.size());
  family.rows = model.kernel().rows(kCoefficients);
  family.hamiltonian = chip.hamiltonian;
  family.couplings = noise.ops;
  family.coefficients = [functions](std::span<const double> s, double* out) {
    const std::vector<double> values = functions->along(kCoefficients, s);
    std::copy(values.begin(), values.end(), out);
  };
  family.derivative = [functions](std::span<const double> s, double* out) {
    const std::vector<double> values = functions->slopes_along(kCoefficients, s);
    std::copy(values.begin(), values.end(), out);
  };
  family.breaks.assign(kinks.begin(), kinks.end());
  return family;
}

LabOperators lab_operators(const PlanModel& model, std::shared_ptr<const Functions> functions) {
  const Chip& chip = model.plan().chip;
  LabOperators lab;
  lab.rows = model.kernel().rows(kCoefficients);
  write_dense(chip.hamiltonian, chip.qubits.size(), lab.hamiltonian);
  write_dense(chip.drive, chip.qubits.size(), lab.hamiltonian);
  for (const Jump& jump : chip.jumps) write_dense(jump.op, chip.qubits.size(), lab.jumps.emplace_back());
  lab.coefficients = [functions](std::span<const double> s, std::span<const double> t, double* out) {
    const std::vector<double> values = functions->at(kCoefficients, s, t);
    std::copy(values.begin(), values.end(), out);
  };
  return lab;
}

std::vector<double> levels_key(const Plan& plan, const Functions& functions, std::span<const double> settings) {
  std::vector<double> key;
  for (const std::uint32_t slot : plan.chip.level_inputs) key.push_back(functions.input(slot));
  for (const Correlation& correlation : plan.chip.correlations) {
    for (const std::uint32_t row : correlation.elements) key.push_back(settings[row]);
  }
  return key;
}

bool finite_levels(const Plan& plan, const Functions& functions) {
  const std::vector<double> s = sampled_positions();
  const std::vector<double> all = functions.along(kCoefficients, s);
  for (const std::uint32_t row : rows_of_levels(plan)) {
    const auto first = all.begin() + static_cast<std::ptrdiff_t>(row * s.size());
    if (!std::all_of(first, first + static_cast<std::ptrdiff_t>(s.size()), [](double x) { return std::isfinite(x); })) {
      return false;
    }
  }
  return true;
}

RangeOfS followed_range(const Timeline& timeline) {
  RangeOfS range = range_of_s(timeline);
  if (const double missing = kNarrowest - (range.highest - range.lowest); missing > 0) {
    range = {std::max(0.0, range.lowest - missing), std::min(1.0, range.highest + missing)};
  }
  return range;
}

}  // namespace tarn::runtime
