#pragma once
/// \file Words with a meaning of their own, which no declaration may take.

#include <string>
#include <string_view>
#include <vector>

namespace tarn {

/// pi, s, exp, gap, any, words of I X Y Z ...
bool is_predefined(std::string_view name);
bool is_pauli_word(std::string_view name);
/// ground, level, state, any, target.
bool is_state_set_word(std::string_view name);

/// All but the words of I X Y Z.
const std::vector<std::string_view>& predefined_words();

/// What the word means, as a remedy for its declaration. Precondition: is_predefined(name).
std::string predefined_remedy(std::string_view name);

}  // namespace tarn
