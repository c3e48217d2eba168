// The jerk-limited plan of a whole path, window by window.
// mm, s.
#include "core/plan/jerk_plan.h"

#include <algorithm>
#include <cmath>
#include <string>

#include "core/plan/jerk_solver.h"

namespace kf::plan {
namespace {

constexpr double kUsualBlockPeriod = 0.001;  // s; common practice

// The jump of x'' q along each axis, over one block period, is at most the jerk limit.
void capCurvatureSteps(const path::Path& path, const limits::Limits& limits, Caps& caps,
                       std::vector<double>& capQ) {
  const double period = limits.blockPeriod.value_or(kUsualBlockPeriod);
  for (std::size_t i = 0; i + 1 < path.size(); ++i) {
    if (path.breakAfter[i] != path::BreakKind::curvatureStep) continue;
    const double step = std::abs(path.k[i + 1] - path.k[i]);
    double q = HUGE_VAL;
    if (limits.x.jerk) q = std::min(q, *limits.x.jerk * period / (step * std::abs(path.ty[i])));
    if (limits.y.jerk) q = std::min(q, *limits.y.jerk * period / (step * std::abs(path.tx[i])));
    for (std::size_t j : {i, i + 1}) {
      if (q >= capQ[j]) continue;
      capQ[j] = caps.q[j] = q;
      caps.limitedBy[j] = LimitName::joint;
    }
  }
}

LimitName rampName(const path::Path& path, const limits::Limits& limits, std::size_t i) {
  LimitName name = LimitName::tangentialJerk;
  double least = limits.tangentialJerk.value_or(HUGE_VAL);
  const auto offer = [&](const std::optional<double>& jerk, double along, LimitName by) {
    if (jerk && *jerk < least * std::abs(along)) {
      least = *jerk / std::abs(along);
      name = by;
    }
  };
  offer(limits.x.jerk, path.tx[i], LimitName::axisJerkX);
  offer(limits.y.jerk, path.ty[i], LimitName::axisJerkY);
  return name;
}

// Gathers the nodes of the time law, each place once.
struct TimeLaw {
  std::vector<double> s, q, slope;
  std::vector<LimitName> names;

  void add(double place, double value, double rate, LimitName name) {
    s.push_back(place);
    q.push_back(value);
    slope.push_back(rate);
    names.push_back(name);
  }
};

}  // namespace

Result<void> planJerk(const path::Path& path, const limits::Limits& limits, std::vector<double> capQ,
                      Plan& plan, RunControl& control) {
  capCurvatureSteps(path, limits, plan.caps, capQ);
  TimeLaw law;
  plan.q.assign(path.size(), 0.0);
  plan.limitedBy.assign(path.size(), LimitName::stop);
  plan.lowerBound = 0.0;
  std::size_t first = 0;
  while (first + 1 < path.size()) {
    std::size_t last = first + 1;
    while (last + 1 < path.size() && capQ[last] > 0.0) ++last;
    std::size_t cells = 0;
    for (std::size_t i = first; i < last; ++i) cells += path.breakAfter[i] == path::BreakKind::none ? 1 : 0;
    if (cells < 3) {
      return Error{ErrorCode::infeasible,
                   "the stretch at s = " + std::to_string(path.s[first]) +
                       " mm is too short for a start and a stop; mend the drawing or let joints be blended"};
    }
    JerkWindow window = makeJerkWindow(path, first, last, capQ, limits);
    const JerkSolution solution = solveJerkWindow(window, control);
    if (control.isCancelled()) return Error{ErrorCode::cancelled, "cancelled"};
    if (!solution.usable) {
      return Error{ErrorCode::infeasible,
                   "no jerk-limited motion was found from s = " + std::to_string(path.s[first]) +
                       " mm on; raise the limits that bind there, or plan with the acceleration law"};
    }
    plan.lowerBound += solution.lowerBound;
    law.add(path.s[first], 0.0, 0.0, rampName(path, limits, first));
    std::size_t node = first + 1;
    for (std::size_t j = 0; j < window.s.size(); ++j) {
      // The path's nodes at this place, one or both sides of a break.
      for (;; ++node) {
        plan.q[node] = solution.q[j];
        plan.limitedBy[node] = solution.capped[j] ? plan.caps.limitedBy[node] : solution.limitedBy[j];
        if (path.breakAfter[node] == path::BreakKind::none) break;
      }
      law.add(window.s[j], solution.q[j], solution.slope[j],
              j + 1 == window.s.size() ? rampName(path, limits, last) : plan.limitedBy[node]);
      ++node;
    }
    plan.limitedBy[first] = law.names[law.names.size() - window.s.size() - 1];
    const bool tangentBreak = last + 1 < path.size();
    if (tangentBreak) plan.limitedBy[last] = LimitName::joint;
    first = tangentBreak ? last + 1 : last;
    control.report(path.s[last] / path.length);
  }
  law.add(path.length, 0.0, 0.0, LimitName::stop);
  law.slope.pop_back();
  plan.schedule = schedule::Schedule::constantJerkLike(std::move(law.s), std::move(law.q),
                                                       std::move(law.slope), std::move(law.names));
  return {};
}

}  // namespace kf::plan
