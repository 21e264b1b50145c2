#include <unistd.h>

#include <algorithm>
#include <cmath>
#include <set>

#include "lang/check/experiment.h"
#include "lang/check/samples.h"

namespace tarn {
namespace {

constexpr std::size_t kMostAtAll = 20;
constexpr std::size_t kMostUnderDavies = 10;
constexpr std::size_t kMostWithAllLevels = 6, kMostWithLevels = 8;  ///< Of redfield, coarse_grained, universal.
constexpr std::size_t kMostUnderHierarchy = 3;

std::size_t most_qubits(EquationKind kind, bool levels) {
  if (kind == EquationKind::davies) return kMostUnderDavies;
  if (kind == EquationKind::hierarchy) return kMostUnderHierarchy;
  if (takes_levels(kind)) return levels ? kMostWithLevels : kMostWithAllLevels;
  return kMostAtAll;
}

/// What takes so many qubits instead.
std::string wider_than(EquationKind kind, bool levels, std::size_t qubits) {
  if (qubits > kMostUnderDavies) return fmt::format("`schroedinger` takes {} qubits and leaves the noise out", kMostAtAll);
  std::string text;
  if (kind == EquationKind::hierarchy && qubits <= kMostWithAllLevels) {
    text = fmt::format("`redfield`, `coarse_grained` and `universal` take {}, ", kMostWithAllLevels);
  } else if (!levels && qubits <= kMostWithLevels) {
    text = fmt::format("with `levels K` {} {}, ", kind == EquationKind::hierarchy ? "`redfield` takes" : "it takes", kMostWithLevels);
  }
  return fmt::format("{}`davies` {}{}", text, text.empty() ? "takes " : "", kMostUnderDavies);
}

/// Bytes that the largest arrays of a run take, from below.
double bytes_needed(const Instance& instance, EquationKind kind) {
  const double dimension = std::exp2(static_cast<double>(instance.qubits.size()));
  constexpr double kComplex = 16;
  if (kind == EquationKind::schroedinger || kind == EquationKind::none) return 12 * kComplex * dimension;
  if (!takes_levels(kind)) return 12 * kComplex * dimension * dimension;
  const double kept = instance.levels ? static_cast<double>(*instance.levels) : dimension;
  return kComplex * (2 * kept * dimension + 12 * kept * kept);
}

/// True if one was reported.
bool check_size(Session& session, const Instance& instance, EquationKind kind, Span span) {
  const std::size_t qubits = instance.qubits.size();
  const bool levels = instance.levels || instance.levels_auto;
  const std::size_t most = most_qubits(kind, levels);
  if (takes_noise(kind) && qubits > most) {
    session.report(span, diag::too_many_for_equation, qubits, most, word_of(kind)).remedy(wider_than(kind, levels, qubits));
    return true;
  }
  const double memory = static_cast<double>(sysconf(_SC_PHYS_PAGES)) * static_cast<double>(sysconf(_SC_PAGE_SIZE));
  const double needed = bytes_needed(instance, kind);
  if (needed <= memory) return false;
  auto tail = session.report(span, diag::too_many_qubits, qubits, needed / (1 << 30));
  if (kind == EquationKind::lindblad) tail.remedy("`schroedinger` needs one state instead of a density matrix");
  if (takes_levels(kind) && !levels) tail.remedy("`levels K` keeps the lowest K levels only");
  return true;
}

void check_sizes(Session& session, const Instance& instance, Span span) {
  if (instance.equations.empty()) check_size(session, instance, EquationKind::none, span);
  for (const EquationI& equation : instance.equations) {
    if (check_size(session, instance, equation.kind, span)) return;
  }
}

/// The first equation that has an error-free text but not the property.
template <class Property>
const EquationI* first_without(const Instance& instance, const Property& property) {
  for (const EquationI& equation : instance.equations) {
    if (equation.kind != EquationKind::none && !property(equation.kind)) return &equation;
  }
  return nullptr;
}

void refuse(Session& session, Span span, std::string_view what, const EquationI& equation, std::string_view why,
            std::string_view remedy) {
  session.report(span, diag::not_with_equation, what, word_of(equation.kind), why)
      .note(equation.span, "this equation")
      .remedy(std::string(remedy));
}

void check_levels(Session& session, const Statements& statements, const Instance& instance) {
  if (statements.levels == nullptr) return;
  const Span span = statements.levels->span;
  if (instance.equations.empty()) session.report(span, diag::unused_statement, "levels", "there is no `equation`");
  const EquationI* other = first_without(instance, takes_levels);
  if (other == nullptr) return;
  refuse(session, span, "`levels`", *other, "it keeps all of them", "`davies`, `redfield`, `coarse_grained` and `universal` take `levels`");
}

void check_trajectories(Session& session, const Statements& statements, const Instance& instance) {
  if (statements.trajectories == nullptr) return;
  const Span span = statements.trajectories->span;
  if (instance.equations.empty()) session.report(span, diag::unused_statement, "trajectories", "there is no `equation`");
  const EquationI* other = first_without(instance, takes_trajectories);
  if (other == nullptr) return;
  constexpr std::string_view kRemedy = "`davies`, `coarse_grained` and `universal` take `trajectories`";
  const EquationKind kind = other->kind;
  if (kind == EquationKind::schroedinger) refuse(session, span, "`trajectories`", *other, "its state is one vector already", kRemedy);
  else if (kind == EquationKind::lindblad) refuse(session, span, "`trajectories`", *other, "it has the density matrix only", kRemedy);
  else refuse(session, span, "`trajectories`", *other, "it is not completely positive, so no mean over state vectors", kRemedy);
}

/// Those that carry the memory of the baths along: there is no generator of the chip alone.
bool carries_memory(const EquationI& equation) {
  return equation.kind == EquationKind::hierarchy || (equation.kind == EquationKind::redfield && equation.memory == MemoryI::driven);
}

/// T1, T2 and `begin steady` want noise or jumps; `times` also a generator that stands still.
void check_relaxation(Session& session, const Instance& instance, std::string_view what, Span span, bool times) {
  for (const EquationI& equation : instance.equations) {
    if (equation.kind == EquationKind::none) continue;
    if (equation.kind == EquationKind::schroedinger) {
      refuse(session, span, what, equation, "nothing relaxes in it", "`davies` takes the noise, `lindblad` the jumps as written");
      return;
    }
    if (times && carries_memory(equation)) {
      refuse(session, span, what, equation, "it carries the memory of its baths along, so no generator stands still",
             "`davies`, `redfield`, `coarse_grained` and `universal` have relaxation times");
      return;
    }
    const bool some = !instance.jumps.empty() || (takes_noise(equation.kind) && !instance.noise.empty());
    if (some || session.diagnostics.has_errors()) continue;
    session.report(span, diag::nothing_relaxes, what, instance.chip, word_of(equation.kind))
        .remedy(instance.noise.empty() ? "`noise Z ~ cold` or `jump sqrt(rate) * |0><1|` in its kinds" : "`davies` takes the noise");
    return;
  }
}

/// Some equations take a jump as one operator: what changes on the way would be left at its first value.
void check_jumps(Session& session, const Instance& instance) {
  const auto taker = std::find_if(instance.equations.begin(), instance.equations.end(), [](const EquationI& equation) {
    return equation.kind == EquationKind::davies || carries_memory(equation);
  });
  if (taker == instance.equations.end()) return;
  for (const JumpTerm& jump : instance.jumps) {
    const bool moves = std::any_of(jump.op.begin(), jump.op.end(), [&](const OperatorTerm& term) {
      const Dependence reads = dependence(session.graph, term.coefficient);
      return reads.s || reads.t;
    });
    if (!moves) continue;
    session.report(jump.span, diag::not_available,
                   fmt::format("a jump that changes with `s` or `t` under `{}`", excerpt(session, taker->span)),
                   "`lindblad` for such jumps");
  }
}

/// Slopes of J at w = 0 decide gamma(0): if they grow without bound, no rate at small w is finite.
bool diverges(const Session& session, NodeId density) {
  constexpr double kNear = 1e-15;  // [rad/ns]
  Sampler sampler(session.graph, {density});
  Bindings bindings;
  for (const ParameterUse& use : session.parameters) bindings.parameters.push_back(use.value);
  const auto slope = [&](double w) {
    bindings.w = w;
    sampler.run(bindings);
    return sampler.value(density) / w;
  };
  return slope(kNear) > 0 && slope(kNear / 16) > slope(kNear) * 1.001;
}

std::set<std::uint32_t> swept_rows(const Instance& instance) {
  std::set<std::uint32_t> swept;
  for (const AxisI& axis : instance.axes) {
    for (const AxisColumnI& column : axis.columns) {
      if (column.index) swept.insert(*column.index);
    }
  }
  return swept;
}

/// True if the value at the defaults is that of every grid point.
bool is_settled(const Session& session, const std::set<std::uint32_t>& swept, NodeId node) {
  const auto reads = dependence(session.graph, node).parameters;
  const bool moves = std::any_of(reads.begin(), reads.end(), [&](std::uint32_t row) { return swept.contains(row); });
  return !moves && is_known(session, node);
}

void check_densities(Session& session, const Instance& instance, const std::set<std::uint32_t>& swept) {
  const auto taker = std::find_if(instance.equations.begin(), instance.equations.end(), [](const EquationI& e) { return takes_noise(e.kind); });
  if (taker == instance.equations.end()) return;
  for (const NoiseTerm& term : instance.noise) {
    const InstanceBath& bath = instance.baths[term.bath];
    if (!is_settled(session, swept, bath.density) || !diverges(session, bath.density)) continue;
    session.report(bath.span, diag::density_at_zero, word_of(taker->kind), bath.name)
        .note(instance.span, fmt::format("`equation {}` stands in this experiment", word_of(taker->kind)))
        .remedy("give J(w) that falls with w at small w, at least as w does; there is no equation for slow noise yet");
  }
}

/// Elimination of a symmetric matrix with 1 on its diagonal: the first row at which a leading part has a
/// negative eigenvalue; nothing if none has. Rounding of the rows before is allowed for.
std::optional<std::size_t> first_negative(std::vector<double> matrix, std::size_t size) {
  constexpr double kRounding = 1e-10;
  const auto at = [&](std::size_t i, std::size_t j) -> double& { return matrix[i * size + j]; };
  for (std::size_t k = 0; k < size; ++k) {
    if (at(k, k) < -kRounding) return k;
    if (at(k, k) <= kRounding) {
      // Nothing of this row is left, or a part of two rows has a negative eigenvalue.
      for (std::size_t i = k + 1; i < size; ++i) {
        if (std::abs(at(i, k)) > std::sqrt(kRounding)) return i;
      }
      continue;
    }
    for (std::size_t i = k + 1; i < size; ++i) {
      const double factor = at(i, k) / at(k, k);
      for (std::size_t j = k + 1; j < size; ++j) at(i, j) -= factor * at(k, j);
    }
  }
  return std::nullopt;
}

/// Diagonal, symmetry and range, entry by entry; true if one was reported.
bool report_entries(Session& session, const CorrelationI& correlation, const std::vector<double>& values) {
  constexpr double kAlike = 1e-12;
  const std::size_t size = correlation.count;
  for (std::size_t i = 0; i < size; ++i) {
    const std::string& first = correlation.indices[i];
    if (std::abs(values[i * size + i] - 1) > kAlike) {
      session.report(correlation.span, diag::correlation_diagonal, first, values[i * size + i]);
      return true;
    }
    for (std::size_t j = 0; j < i; ++j) {
      const double one = values[j * size + i], other = values[i * size + j];
      const std::string& second = correlation.indices[j];
      if (std::abs(one - other) > kAlike) {
        session.report(correlation.span, diag::correlation_symmetry, second, first, one, other).remedy("`abs(i - j)` is the same both ways");
        return true;
      }
      if (std::abs(one) <= 1 + kAlike) continue;
      session.report(correlation.span, diag::correlation_negative, fmt::format("that of {} and {} is {:.6g}, outside -1 .. 1", second, first, one));
      return true;
    }
  }
  return false;
}

void check_correlation(Session& session, const CorrelationI& correlation, const std::set<std::uint32_t>& swept) {
  std::vector<double> values;
  for (const NodeId element : correlation.elements) {
    if (!is_settled(session, swept, element)) return;
    values.push_back(value_at_defaults(session, element).value_or(NAN));
    if (std::isfinite(values.back())) continue;
    session.report(correlation.span, diag::not_finite, excerpt(session, correlation.span));
    return;
  }
  if (report_entries(session, correlation, values)) return;
  const auto row = first_negative(values, correlation.count);
  if (!row) return;
  session.report(correlation.span, diag::correlation_negative,
                 fmt::format("their matrix has a negative eigenvalue, up to {}", correlation.indices[*row]))
      .remedy("`c^abs(i - j)` with c in -1 .. 1 is one that noise can have");
}

}  // namespace

void check_equations(Session& session, const Statements& statements, const Readings& readings, const Instance& instance) {
  check_sizes(session, instance, statements.chip->span);
  check_jumps(session, instance);
  check_levels(session, statements, instance);
  check_trajectories(session, statements, instance);
  if (readings.relaxation) {
    const Span span = *readings.relaxation;
    check_relaxation(session, instance, fmt::format("`{}`", excerpt(session, span)), span, true);
  }
  const bool steady = instance.begin && std::holds_alternative<BeginSteadyI>(*instance.begin);
  if (steady) check_relaxation(session, instance, "`begin steady`", statements.begin->span, false);
}

void check_baths(Session& session, const Instance& instance) {
  const std::set<std::uint32_t> swept = swept_rows(instance);
  check_densities(session, instance, swept);
  for (const CorrelationI& correlation : instance.correlations) check_correlation(session, correlation, swept);
}

}  // namespace tarn
