#pragma once
/// \file Whether an equation of motion may be believed at one place of a run: conditions, each a ratio that has to
/// be small, and what they say together.
///
/// A ratio below 0.1 is within the equation's range, below 0.5 marginal, above outside: common practice, no
/// source. The table below was calibrated against the hierarchy; conditions.h says how.

#include <Eigen/Core>
#include <cstdint>
#include <limits>
#include <optional>
#include <string>
#include <string_view>
#include <vector>

#include "runtime/bath/bath_times.h"
#include "runtime/plan/plan.h"
#include "runtime/validity/conditions.h"

namespace tarn::runtime {

enum class Validity : std::uint8_t { within, marginal, outside };

/// NaN is outside.
Validity validity_of(double ratio);
std::string_view validity_name(Validity validity);

/// One noise operator with its bath.
struct NoiseScale {
  double norm = 1;       ///< Of A: half the distance of its outer eigenvalues.
  BathTimes times = {};  ///< Of the bath, for an operator of norm 1.
  double window = 0;     ///< T_a [ns]; coarse-grained only.

  double tau_sb() const { return times.tau_sb / (norm * norm); }
};

/// One place of one run.
struct ValidityInput {
  Equation equation = Equation::none;
  Memory memory = Memory::markov;  ///< Of redfield.
  double s = 0, t = 0;             ///< t in ns; 0 where there is no pace.
  std::vector<NoiseScale> noises;
  double drive = 0;                ///< |dH/dt| = |dH/ds| |ds/dt|, half the distance of the outer eigenvalues [rad/ns^2].
  Eigen::VectorXd energies;        ///< Of the levels kept, ascending [rad/ns].
  std::optional<double> t1, t2;    ///< [ns], from the generator; none where it has no such mode. Infinity: no decay.
  double largest_rate = 0;         ///< The fastest decay of any mode of the generator [1/ns].
  double secular = 0;              ///< secular_ratio() of secular.h; davies only.
  double heating = 0;              ///< window_heating() of window.h; coarse-grained only.
  double leakage = 0;              ///< Population that has left the levels kept by t.
  double tolerance = 1e-6;         ///< Asked of the answers, > 0.
};

struct ConditionRatio {
  const Condition* condition = nullptr;  ///< A row of kConditions.
  double ratio = 0;
  Validity validity = Validity::within;
  std::string sentence;  ///< What was compared, in ns, GHz and 1/us; lower case, no full stop.
};

/// A published measure of error without its constants: a scale, no bound. Source: Quantum 4, 227 (2020).
struct ErrorScale {
  std::string_view name;
  double value = 0;
};

struct ValidityJudgement {
  double s = 0, t = 0;
  std::vector<ConditionRatio> conditions;  ///< In the order of kConditions; none for an equation without conditions.
  std::size_t worst = 0;                   ///< The largest ratio, if there are conditions.
  Validity validity = Validity::within;
  std::vector<ErrorScale> scales;
  // What it was judged by, the shortest or largest over the noise operators:
  double tau_sb = std::numeric_limits<double>::infinity(), tau_b = 0, window = 0;  ///< [ns]
  std::optional<double> t1, t2;                                                    ///< [ns]
  double spacing = std::numeric_limits<double>::infinity();                        ///< smallest_spacing() [rad/ns]
};

ValidityJudgement judge(const ValidityInput& input);

/// The smallest difference of two Bohr frequencies E_m - E_n that is no coincidence (above 1e-8 of the width) [rad/ns];
/// infinity if there is none.
double smallest_spacing(const Eigen::VectorXd& energies);

}  // namespace tarn::runtime
