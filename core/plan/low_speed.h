// Where a plan is slower than the cut wants: burning, rubbing, melting.
// mm, s.
#pragma once

#include <vector>

#include "core/plan/plan.h"

namespace kf::plan {

// A stretch that the machine's limits keep below the lower speed.
struct LowSpeedStretch {
  double from = 0.0, to = 0.0;            // arc length
  double time = 0.0;                      // s spent in it
  double slowest = 0.0;                   // mm/s; 0 at a stop
  LimitName limitedBy = LimitName::stop;  // what holds most of that time
};

// All stretches on which the planned speed is below `lower`, in order. A plan is as fast as its limits allow,
// so there the lower speed can't be had under them. Domain  lower > 0.  Accuracy  crossings exact where v^2
// is linear in a cell.  Cost  O(nodes).
std::vector<LowSpeedStretch> lowSpeedStretches(const schedule::Schedule& schedule, double lower);

}  // namespace kf::plan
