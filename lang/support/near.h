#pragma once
/// \file Words that are spelt almost alike: for "did you mean".

#include <algorithm>
#include <cstddef>
#include <string_view>
#include <vector>

namespace tarn {

/// Letters to insert, delete or exchange to turn `a` into `b` (Levenshtein distance).
inline std::size_t edit_distance(std::string_view a, std::string_view b) {
  std::vector<std::size_t> row(b.size() + 1);
  for (std::size_t j = 0; j <= b.size(); ++j) row[j] = j;
  for (std::size_t i = 1; i <= a.size(); ++i) {
    std::size_t diagonal = row[0];
    row[0] = i;
    for (std::size_t j = 1; j <= b.size(); ++j) {
      const std::size_t changed = diagonal + (a[i - 1] == b[j - 1] ? 0 : 1);
      diagonal = row[j];
      row[j] = std::min({changed, row[j] + 1, row[j - 1] + 1});
    }
  }
  return row.back();
}

inline bool equal_but_for_case(std::string_view a, std::string_view b) {
  const auto lower = [](char c) { return c >= 'A' && c <= 'Z' ? static_cast<char>(c - 'A' + 'a') : c; };
  return std::equal(a.begin(), a.end(), b.begin(), b.end(), [&](char x, char y) { return lower(x) == lower(y); });
}

/// The candidate that `word` may be a slip for: one that differs in case only, else the
/// first nearest with at most one slip per three letters. Empty if there is none.
/// Long words (over 40 bytes) are not compared.
template <class Candidates>
std::string_view near_word(std::string_view word, const Candidates& candidates) {
  constexpr std::size_t kLongest = 40;
  if (word.size() > kLongest) return {};
  std::string_view best;
  std::size_t best_distance = word.size() / 3 + 1;
  for (const std::string_view candidate : candidates) {
    if (candidate.size() > kLongest || candidate == word) continue;
    if (equal_but_for_case(word, candidate)) return candidate;
    const std::size_t distance = edit_distance(word, candidate);
    if (distance < best_distance) {
      best_distance = distance;
      best = candidate;
    }
  }
  return best;
}

}  // namespace tarn
