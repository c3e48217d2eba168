// Interior-point solver for one jerk-limited window; internal to plan.
// mm, s.
#pragma once

#include <vector>

#include "core/base/run_control.h"
#include "core/plan/jerk_window.h"

namespace kf::plan {

struct JerkSolution {
  std::vector<double> q, slope;      // at the window's nodes: v^2 and its derivative along arc length
  std::vector<LimitName> limitedBy;  // the row that is used most at each node
  std::vector<bool> capped;          // the cap on speed is used more than any row
  double lowerBound = 0.0;           // of the time over the window, both ramps included; see below
  bool usable = false;               // q is feasible on the nodes
  int steps = 0;
};

// Two interior-point runs over the same rows.
//
// First     the true problem, from a slow start that is feasible. Every iterate stays feasible on the nodes,
// so an early
//           stop still leaves a plan. The convex part of the Lagrangian's curvature is kept, the rest
//           dropped.
// Then      the jerk rows divided by v and t = q^(-1/2) relaxed to t >= q^(-1/2), which is convex (Consolini
// &
//           Locatelli, Automatica 2024, for path jerk). Its Lagrangian at any nonnegative multipliers, less
//           what its gradient can still gain over the box of feasible coefficients, is a lower bound of the
//           discretised time.
// Accuracy  complementarity 1e-7 of the time, or a plan that is usable but further from the best after 120
// steps. Cost      O(nodes) a step, 30 to 60 steps a run on smooth paths; no allocation inside a step.
JerkSolution solveJerkWindow(JerkWindow& window, RunControl& control);

}  // namespace kf::plan
