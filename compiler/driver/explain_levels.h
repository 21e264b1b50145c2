#pragma once
/// \file Energy scales along s for `tarn explain`.

#include <optional>
#include <string>
#include <vector>

#include "compiler/driver/prepare.h"

namespace tarn::compiler {

/// Levels of H without terms in t at one s, in rad/ns.
struct LevelRow {
  double s = 0;
  double ground = 0;
  std::optional<double> gap;  ///< Above the ground set; none if all levels are one.
  double width = 0;           ///< Highest minus lowest level.
  std::size_t degeneracy = 1; ///< Of the ground level.
};

struct LevelSummary {
  std::vector<LevelRow> rows;         ///< At even s with both ends.
  std::optional<LevelRow> smallest;   ///< Where the gap is smallest, found to 1e-4 in s.
  std::string failure;                ///< Why there are no rows; empty if there are.
};

LevelSummary levels_along(const Prepared& prepared, std::size_t rows);

/// The smallest distance between neighbours among the lowest `count` levels, those that coincide
/// counting as one, over `rows` >= 2 even s with both ends. None if all coincide or none can be had.
struct Spacing {
  double distance = 0;  ///< [rad/ns]
  double s = 0;
};
std::optional<Spacing> smallest_spacing(const Prepared& prepared, std::size_t count, std::size_t rows);

}  // namespace tarn::compiler
