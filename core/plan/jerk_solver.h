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
// First     the jerk rows divided by v and t = q^(-1/2) relaxed to t >= q^(-1/2), which is convex (Consolini
// &
//           Locatelli, Automatica 2024, for path jerk). Its Lagrangian at any nonnegative multipliers, less
//           what its gradient can still gain over the box of feasible coefficients, is a proved lower bound
//           of the discretised time.
// Then      the true problem, from the relaxed solution scaled until it is feasible. Every iterate stays
// feasible, so an
//           early stop still leaves a plan. The convex part of the Lagrangian's curvature is kept, the rest
//           dropped.
// Accuracy  complementarity 1e-7 of the time, or `usable` with a larger gap after kMostSteps.
// Cost      O(nodes) a step, about 25 steps a run; no allocation inside a step.
JerkSolution solveJerkWindow(JerkWindow& window, RunControl& control);

}  // namespace kf::plan
