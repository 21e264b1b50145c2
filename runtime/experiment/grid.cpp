#include "runtime/experiment/grid.h"

#include <algorithm>
#include <cmath>

#include "lang/support/check.h"

namespace tarn::runtime {

std::uint64_t grid_size(const std::vector<Axis>& axes) {
  std::uint64_t size = 1;
  for (const Axis& axis : axes) size *= axis.size();
  return size;
}

std::vector<std::size_t> grid_position(const std::vector<Axis>& axes, std::uint64_t index) {
  TARN_CHECK(index < grid_size(axes));
  std::vector<std::size_t> position(axes.size());
  for (std::size_t a = axes.size(); a-- > 0;) {
    position[a] = static_cast<std::size_t>(index % axes[a].size());
    index /= axes[a].size();
  }
  return position;
}

std::vector<double> grid_values(const std::vector<Axis>& axes, std::uint64_t index) {
  const std::vector<std::size_t> position = grid_position(axes, index);
  std::vector<double> values;
  for (std::size_t a = 0; a < axes.size(); ++a) {
    for (const AxisColumn& column : axes[a].columns) values.push_back(column.values[position[a]]);
  }
  return values;
}

std::vector<std::uint64_t> sample_of_grid(std::uint64_t size, std::uint64_t count) {
  TARN_CHECK(size >= 1 && count >= 1);
  count = std::min(size, count);
  if (count == 1) return {0};
  std::vector<std::uint64_t> indices(count);
  const long double step = static_cast<long double>(size - 1) / static_cast<long double>(count - 1);
  for (std::uint64_t i = 0; i < count; ++i) {
    indices[i] = static_cast<std::uint64_t>(std::llround(step * static_cast<long double>(i)));
  }
  return indices;
}

}  // namespace tarn::runtime
