// Thinning of a curve for the screen.
// Any units.
#include "ui/plot/decimate.h"

#include <algorithm>
#include <array>
#include <cstddef>

namespace kf::ui {

Thinned thinned(const std::vector<double>& x, const std::vector<double>& y, double low, double high,
                int columns) {
  Thinned out;
  if (x.empty() || !(low < high)) return out;
  auto from = static_cast<std::size_t>(std::lower_bound(x.begin(), x.end(), low) - x.begin());
  auto to = static_cast<std::size_t>(std::upper_bound(x.begin(), x.end(), high) - x.begin());
  if (from > 0) --from;
  if (to < x.size()) ++to;
  const auto add = [&](std::size_t i) {
    out.x.push_back(x[i]);
    out.y.push_back(y[i]);
  };
  if (to - from <= 4 * static_cast<std::size_t>(columns)) {
    for (std::size_t i = from; i < to; ++i) add(i);
    return out;
  }
  const auto columnOf = [&](std::size_t i) {
    return static_cast<long>((x[i] - low) / (high - low) * columns);
  };
  for (std::size_t i = from; i < to;) {
    const std::size_t first = i;
    std::size_t least = i, most = i;
    const long column = columnOf(i);
    for (; i < to && columnOf(i) == column; ++i) {
      if (y[i] < y[least]) least = i;
      if (y[i] > y[most]) most = i;
    }
    std::array<std::size_t, 4> keep = {first, least, most, i - 1};
    std::sort(keep.begin(), keep.end());
    for (std::size_t j = 0; j < keep.size(); ++j) {
      if (j == 0 || keep[j] != keep[j - 1]) add(keep[j]);
    }
  }
  return out;
}

}  // namespace kf::ui
