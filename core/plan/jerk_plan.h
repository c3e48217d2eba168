// The jerk-limited plan of a whole path, window by window; internal to plan.
// mm, s.
#pragma once

#include "core/plan/plan.h"

namespace kf::plan {

// Fills schedule, q, limitedBy, time and lowerBound of a plan whose caps are set. `capQ` is 0 at rest.
//
// A step of the curvature is passed at the speed at which its change of acceleration, spread over one block
// period (1 ms where the limits give none), stays within the jerk limits. Fails  infeasible  a stretch
// between two stops has no room for the ramps; cancelled.
Result<void> planJerk(const path::Path& path, const limits::Limits& limits, std::vector<double> capQ,
                      Plan& plan, RunControl& control);

}  // namespace kf::plan
