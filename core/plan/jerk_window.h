// The jerk-limited problem between two stops as rows over spline coefficients; internal to plan.
// mm, s.
#pragma once

#include <array>
#include <cstddef>
#include <vector>

#include "core/base/limit_name.h"
#include "core/limits/limits.h"
#include "core/path/path.h"

namespace kf::plan {

// q = v^2 is a quadratic spline in arc length: continuous slope, constant q'' in each cell. Its coefficients
// b stand one for a cell, with a ghost at each end. At the node between cells i-1 and i
//   q = (h_i b_(i-1) + h_(i-1) b_i) / (h_(i-1) + h_i),   q' = 2 (b_i - b_(i-1)) / (h_(i-1) + h_i),
// and q'' of cell i is (q'_(i+1) - q'_i) / h_i. So whatever happens at node i depends on b_(i-2) .. b_(i+1).
// The first and the last cell of the stretch, which begin or end at rest, are ramps of constant jerk outside
// the spline: s = J t^3/6, hence q' = 4 q / (3 s) where the ramp meets the spline; that removes the ghosts
// (ghost = rho * neighbour).
struct TwoSided {
  std::array<double, 4> a{};     // coefficients on b_(i-2) .. b_(i+1) of the node's window
  double limit = 0.0;            // acceleration rows: |a.b| <= limit; jerk rows: |a.b| <= limit * q^(-1/2)
  double low = 1.0, high = 1.0;  // multipliers
  LimitName name = LimitName::tangentialJerk;
  bool jerk = false;
};

struct JerkNode {
  std::size_t firstRow = 0, rows = 0;  // in JerkWindow::rows
  std::array<double, 2> q{};           // coefficients of q on b_(i-1), b_i
  double cap = 0.0;                    // on q
  double capMultiplier = 1.0;
  double weight = 0.0;  // of q^(-1/2) in the time
};

struct JerkCell {
  std::array<double, 3> middle{};  // coefficients of q at the cell's middle on b_(i-1), b_i, b_(i+1)
  double weight = 0.0;
};

struct JerkWindow {
  std::vector<double> s;        // inner nodes, from the end of the first ramp to the start of the last
  std::vector<JerkNode> nodes;  // one for each of s
  std::vector<JerkCell> cells;  // s.size() - 1
  std::vector<TwoSided> rows;
  double startRamp = 0.0, endRamp = 0.0;    // lengths
  double startGhost = 0.0, endGhost = 0.0;  // ghost = rho * neighbour
  double steepest = 0.0;                    // no feasible |q'| exceeds it
};

// The stretch of path nodes first..last, both at rest, with caps on q at the path's nodes.
// Domain  at least three ordinary cells between first and last.
JerkWindow makeJerkWindow(const path::Path& path, std::size_t first, std::size_t last,
                          const std::vector<double>& capQ, const limits::Limits& limits);

}  // namespace kf::plan
