#include "lang/check/predefined.h"

#include <fmt/format.h>

#include <algorithm>
#include <array>

namespace tarn {
namespace {

constexpr std::string_view kFunction = "a function";
constexpr std::string_view kSet = "a set of states";

struct Meaning {
  std::string_view word, is;
};

constexpr std::array kMeanings = std::to_array<Meaning>({
    {"pi", "the number 3.14159..."},
    {"hbar", "the reduced Planck constant"},
    {"kB", "the Boltzmann constant"},
    {"e", "the elementary charge"},
    {"s", "the place along the anneal"},
    {"t", "the time since the pace began"},
    {"H", "the Hamiltonian"},
    {"exp", kFunction},
    {"ln", kFunction},
    {"log10", kFunction},
    {"sqrt", kFunction},
    {"sin", kFunction},
    {"cos", kFunction},
    {"tan", kFunction},
    {"asin", kFunction},
    {"acos", kFunction},
    {"atan", kFunction},
    {"sinh", kFunction},
    {"cosh", kFunction},
    {"tanh", kFunction},
    {"abs", kFunction},
    {"floor", kFunction},
    {"mod", kFunction},
    {"min", kFunction},
    {"max", kFunction},
    {"clamp", kFunction},
    {"table", "what reads a table"},
    {"list", "what makes a list"},
    {"column", "what reads a column of a table"},
    {"rows", "what reads the rows of a table"},
    {"ground", kSet},
    {"level", kSet},
    {"state", kSet},
    {"any", kSet},
    {"target", kSet},
    {"population", "the probability of a set of states"},
    {"mean", "the expectation of an operator"},
    {"E", "the energy of a level"},
    {"gap", "the gap above the ground level"},
    {"purity", "the purity of the state"},
    {"coherence", "the coherence between two levels"},
    {"fidelity", "the overlap with a state"},
    {"rate", "the rate between sets of states"},
    {"T1", "the relaxation time as an observable"},
    {"T2", "the dephasing time as an observable"},
    {"effective_temperature", "an observable"},
    {"lowest", "the lowest value of a trace or a scan"},
    {"highest", "the highest value of a trace or a scan"},
    {"final", "the last value of a trace or a scan"},
    {"verdict", "the judgement of an equation's validity"},
    {"within", "a verdict"},
    {"marginal", "a verdict"},
    {"outside", "a verdict"},
    {"quantile", "a quantile over an ensemble"},
    {"fraction", "the fraction of an ensemble"},
});

const Meaning* find_meaning(std::string_view name) {
  const auto row = std::find_if(kMeanings.begin(), kMeanings.end(), [&](const Meaning& m) { return m.word == name; });
  return row == kMeanings.end() ? nullptr : &*row;
}

}  // namespace

bool is_pauli_word(std::string_view name) {
  return !name.empty() && name.find_first_not_of("IXYZ") == std::string_view::npos;
}

bool is_predefined(std::string_view name) { return is_pauli_word(name) || find_meaning(name) != nullptr; }

bool is_state_set_word(std::string_view name) {
  const Meaning* meaning = find_meaning(name);
  return meaning != nullptr && meaning->is == kSet;
}

const std::vector<std::string_view>& predefined_words() {
  static const std::vector<std::string_view> words = [] {
    std::vector<std::string_view> all;
    for (const Meaning& meaning : kMeanings) all.push_back(meaning.word);
    return all;
  }();
  return words;
}

std::string predefined_remedy(std::string_view name) {
  const Meaning* meaning = find_meaning(name);
  const std::string_view is = meaning == nullptr ? "an operator, like every word of the letters I X Y Z" : meaning->is;
  return fmt::format("it is {}; choose another name, such as `my_{}`", is, name);
}

}  // namespace tarn
