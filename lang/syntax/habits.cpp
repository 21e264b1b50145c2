#include "lang/syntax/habits.h"

#include <array>

namespace tarn {
namespace {

struct Habit {
  std::string_view word, here;
};

constexpr auto kStatements = std::to_array<Habit>({
    {"pause", "hold"}, {"wait", "hold"}, {"quench", "step"}, {"import", "use"}, {"include", "use"}, {"def", "function"},
    {"param", "parameter"}, {"measure", "observe"}, {"assert", "expect"}, {"hamiltonian", "energy"},
});

constexpr std::string_view kX = "operators are `X`, `Y`, `Z`, `I` and `|0><1|`";
constexpr std::string_view kLowering = "`|0><1|` takes |1> to |0>";
constexpr std::string_view kRaising = "`|1><0|` takes |0> to |1>";
constexpr std::string_view kLog = "`ln` is the natural logarithm, `log10` the decimal one";
constexpr std::string_view kLoop = "a loop runs over `0 .. n-1`, both ends included; a sweep over `linear(a, b, n)` or `log(a, b, n)`";

constexpr auto kValues = std::to_array<Habit>({
    {"sx", kX}, {"sy", kX}, {"sz", kX}, {"sigmax", kX}, {"sigmay", kX}, {"sigmaz", kX},
    {"sigma_x", kX}, {"sigma_y", kX}, {"sigma_z", kX}, {"sigmam", kLowering}, {"sigma_m", kLowering},
    {"sigmap", kRaising}, {"sigma_p", kRaising}, {"log", kLog}, {"range", kLoop}, {"arange", kLoop},
    {"probability", "`population(...)` of a set of states"}, {"arcsin", "`asin`"}, {"arccos", "`acos`"}, {"arctan", "`atan`"}, {"fabs", "`abs`"},
    {"linspace", "`linear(a, b, n)`"}, {"logspace", "`log(a, b, n)`"},
    {"k_B", "`kB`"}, {"kb", "`kB`"}, {"Pi", "`pi`"},
    {"distribution", "the distribution is its own answer: `observe distribution at end`"},
    {"w", "w is the argument of a spectrum: `spectrum j(w) = ...`, which a bath names as `density j`"},
});

template <class Habits>
std::string_view find(const Habits& habits, std::string_view word) {
  for (const Habit& habit : habits) {
    if (habit.word == word) return habit.here;
  }
  return {};
}

}  // namespace

std::string_view statement_for(std::string_view word) { return find(kStatements, word); }
std::string_view value_for(std::string_view word) { return find(kValues, word); }

}  // namespace tarn
