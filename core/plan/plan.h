// From a path and limits to the fastest motion along it, with a lower bound on the time.
// mm, s.
#pragma once

#include <cstddef>
#include <vector>

#include "core/base/limit_name.h"
#include "core/base/result.h"
#include "core/base/run_control.h"
#include "core/limits/limits.h"
#include "core/path/path.h"
#include "core/schedule/schedule.h"

namespace kf::plan {

enum class Law { acceleration, jerk };
enum class Joints { blend, exact };

struct Options {
  Law law = Law::acceleration;
};

// The largest speed that limits on speed alone allow at each node, and which of them it is.
struct Caps {
  std::vector<double> q;  // v^2, mm^2/s^2, one a node of the path
  std::vector<LimitName> limitedBy;
};
// Cost  O(nodes).
Caps speedCaps(const path::Path& path, const limits::Limits& limits);

// Seconds saved when one limit is raised by `changePercent`.
struct Price {
  LimitName limit = LimitName::feed;
  double changePercent = 10.0;
  double timeSaved = 0.0;
};

struct Plan {
  schedule::Schedule schedule;       // strictly rising s: breaks of the path appear once
  Caps caps;                         // at the path's nodes
  std::vector<double> q;             // planned v^2 at the path's nodes
  std::vector<LimitName> limitedBy;  // at the path's nodes
  double time = 0.0;
  double lowerBound = 0.0;  // no motion under the same limits, discretised on the same nodes, takes less
  std::vector<double> timeByLimit;  // index LimitName; sums to time
};

// Fails  invalidArgument  limits::validateForPlan refuses the limits.
//        infeasible       the limits allow no motion at some place (the message says where).
//        cancelled        by `control`.
// Cost   O(nodes).
Result<Plan> makePlan(const path::Path& path, const limits::Limits& limits, const Options& options,
                      RunControl& control);

// Re-plans with each present limit raised by `changePercent` and reports what that saves; largest first.
Result<std::vector<Price>> prices(const path::Path& path, const limits::Limits& limits,
                                  const Options& options, double changePercent, RunControl& control);

}  // namespace kf::plan
