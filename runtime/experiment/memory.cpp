#include "runtime/experiment/memory.h"

#include <algorithm>
#include <cmath>
#include <fstream>
#include <limits>
#include <string>

namespace tarn::runtime {
namespace {

constexpr double kComplex = 16;  // bytes

/// The stages of the explicit pair with state, argument and error, and the states read on the way.
constexpr double kVectors = 20;

/// Base nodes of a usual chip's track. Refinements and tables take no more than what is left (budget.h).
constexpr double kNodes = 1500;

bool reads_levels(const Plan& plan) {
  return std::any_of(plan.readings.begin(), plan.readings.end(), [](const Reading& reading) {
    const auto* population = std::get_if<ReadPopulation>(&reading);
    const bool spans = population && (population->set.kind == StateSetKind::ground || population->set.kind == StateSetKind::level);
    return spans || std::holds_alternative<ReadCoherence>(reading) || std::holds_alternative<ReadLevel>(reading) ||
           std::holds_alternative<ReadGap>(reading);
  });
}

}  // namespace

MemoryNeed memory_needed(const Plan& plan, std::size_t lanes) {
  const double dimension = std::exp2(static_cast<double>(plan.chip.qubits.size()));
  const double points = static_cast<double>(std::max<std::size_t>(1, lanes));
  MemoryNeed need;
  const double vectors = reads_levels(plan) ? 8 : 1;
  need.each_job = vectors * kComplex * dimension * points;
  if (plan.choice.equation == Equation::schroedinger) need.each_job += kVectors * kComplex * dimension * points;
  if (plan.choice.equation == Equation::lindblad) need.each_job += kVectors * kComplex * dimension * dimension * points;
  if (plan.choice.equation == Equation::davies) {
    const double kept = plan.levels ? std::min(dimension, static_cast<double>(*plan.levels)) : dimension;
    need.each_job += kNodes * 8 * dimension * kept + 20 * kComplex * dimension * dimension;
  }
  return need;
}

std::optional<double> memory_available() {
  std::ifstream report("/proc/meminfo");
  for (std::string word; report >> word;) {
    double kib = 0;
    if (word == "MemAvailable:" && report >> kib) return 1024 * kib;
  }
  return std::nullopt;
}

std::size_t jobs_that_fit(const MemoryNeed& need, std::size_t asked, double available) {
  if (need.common + need.each_job > available) return 0;
  const double most = need.each_job > 0 ? (available - need.common) / need.each_job : std::numeric_limits<double>::infinity();
  return most >= static_cast<double>(asked) ? asked : static_cast<std::size_t>(most);
}

}  // namespace tarn::runtime
