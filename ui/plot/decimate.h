// Thinning of a curve for the screen, without losing a peak.
// Any units.
#pragma once

#include <vector>

namespace kf::ui {

struct Thinned {
  std::vector<double> x, y;
};

// Of the points with low <= x <= high, and one neighbour on each side: the first, lowest, highest and last in
// each of `columns` columns, in their own order. Domain: x nondecreasing, sizes equal, columns >= 1. Cost:
// O(log n + points shown).
Thinned thinned(const std::vector<double>& x, const std::vector<double>& y, double low, double high,
                int columns);

}  // namespace kf::ui
