// A plan put together: caps, the solver, the time law, names of what binds, and the lower bound.
// mm, s.
#include "core/plan/plan.h"

#include <algorithm>
#include <cmath>
#include <string>

#include "core/plan/jerk_plan.h"
#include "core/plan/second_order.h"

namespace kf::plan {
namespace {

// Zero where the motion rests: both ends, and both sides of each tangent break.
std::vector<double> capsWithStops(const path::Path& path, const Caps& caps) {
  std::vector<double> q = caps.q;
  q.front() = q.back() = 0.0;
  for (std::size_t i = 0; i + 1 < path.size(); ++i) {
    if (path.breakAfter[i] == path::BreakKind::tangentBreak) q[i] = q[i + 1] = 0.0;
  }
  return q;
}

double travelTime(const path::Path& path, const std::vector<double>& q) {
  double time = 0.0;
  for (std::size_t i = 0; i + 1 < path.size(); ++i) {
    const double h = path.s[i + 1] - path.s[i];
    if (h > 0.0) time += 2.0 * h / (std::sqrt(q[i]) + std::sqrt(q[i + 1]));
  }
  return time;
}

// What binds over the cell i: a cap that both ends touch, else the acceleration row that is used up, else the
// cap that one end touches, else whatever is used most.
LimitName nameOfCell(const path::Path& path, const AccelerationLimits& limits, const Caps& caps,
                     const std::vector<double>& q, std::size_t i) {
  constexpr double kTouch = 1.0 - 1e-7;
  const bool start = q[i] >= kTouch * caps.q[i], end = q[i + 1] >= kTouch * caps.q[i + 1];
  if (start && end) return caps.limitedBy[i];
  const Binding row = tightestRow(path, limits, i, q[i], q[i + 1]);
  if (row.use >= kTouch) return row.name;
  if (start) return caps.limitedBy[i];
  if (end) return caps.limitedBy[i + 1];
  return row.use > std::max(q[i] / caps.q[i], q[i + 1] / caps.q[i + 1]) ? row.name : caps.limitedBy[i];
}

void nameNodes(const path::Path& path, const limits::Limits& limits, Plan& plan) {
  const AccelerationLimits rows = accelerationLimits(limits);
  const std::size_t n = path.size();
  plan.limitedBy.assign(n, LimitName::stop);
  for (std::size_t i = 0; i + 1 < n; ++i) {
    if (path.breakAfter[i] == path::BreakKind::none)
      plan.limitedBy[i] = nameOfCell(path, rows, plan.caps, plan.q, i);
  }
  for (std::size_t i = 0; i + 1 < n; ++i) {
    if (path.breakAfter[i] == path::BreakKind::tangentBreak) {
      plan.limitedBy[i] = LimitName::joint;
    } else if (path.breakAfter[i] != path::BreakKind::none) {
      plan.limitedBy[i] = plan.limitedBy[i + 1];
    }
  }
}

// The time law over the nodes with each place once; at a break the later side's name counts.
schedule::Schedule scheduleOf(const path::Path& path, const Plan& plan) {
  std::vector<double> s, q;
  std::vector<LimitName> names;
  const std::size_t n = path.size();
  s.reserve(n);
  q.reserve(n);
  names.reserve(n);
  for (std::size_t i = 0; i < n; ++i) {
    if (i + 1 < n && path.breakAfter[i] != path::BreakKind::none) continue;
    s.push_back(path.s[i]);
    q.push_back(plan.q[i]);
    names.push_back(plan.limitedBy[i]);
  }
  return schedule::Schedule::constantAcceleration(std::move(s), std::move(q), std::move(names));
}

std::string placeOf(const path::Path& path, std::size_t i) {
  return "s = " + std::to_string(path.s[i]) + " mm (x " + std::to_string(path.x[i]) + ", y " +
         std::to_string(path.y[i]) + ")";
}

Result<void> checkMoves(const path::Path& path, const std::vector<double>& q) {
  for (std::size_t i = 0; i + 1 < path.size(); ++i) {
    if (path.breakAfter[i] != path::BreakKind::none) continue;
    if (!(q[i] + q[i + 1] > 0.0) || !std::isfinite(q[i] + q[i + 1])) {
      return Error{ErrorCode::infeasible, "no motion is possible under these limits at " + placeOf(path, i) +
                                              "; raise the limits that bind there"};
    }
  }
  return {};
}

Result<void> planAcceleration(const path::Path& path, const limits::Limits& limits,
                              const std::vector<double>& capQ, Plan& plan, RunControl& control) {
  SecondOrder solution = solveSecondOrder(path, capQ, accelerationLimits(limits));
  plan.q = std::move(solution.q);
  if (auto moves = checkMoves(path, plan.q); !moves) return moves;
  if (control.isCancelled()) return Error{ErrorCode::cancelled, "cancelled"};
  nameNodes(path, limits, plan);
  plan.schedule = scheduleOf(path, plan);
  plan.lowerBound = travelTime(path, solution.envelope);
  return {};
}

}  // namespace

Result<Plan> makePlan(const path::Path& path, const limits::Limits& limits, const Options& options,
                      RunControl& control) {
  if (auto valid = limits::validateForPlan(limits); !valid) return valid.error();
  if (control.isCancelled()) return Error{ErrorCode::cancelled, "cancelled"};
  Plan plan;
  plan.caps = speedCaps(path, limits);
  std::vector<double> capQ = capsWithStops(path, plan.caps);
  auto done = options.law == Law::jerk ? planJerk(path, limits, std::move(capQ), plan, control)
                                       : planAcceleration(path, limits, capQ, plan, control);
  if (!done) return done.error();
  plan.time = plan.schedule.time();
  plan.lowerBound = std::min(plan.time, plan.lowerBound);
  plan.timeByLimit = plan.schedule.timeByLimit();
  control.report(1.0);
  return plan;
}

}  // namespace kf::plan
