// The plan under jerk limits: closed forms, bounds, and the motion differenced by time.
// mm, s.
#include <gtest/gtest.h>

#include <algorithm>
#include <array>
#include <cmath>
#include <numbers>
#include <tuple>

#include "core/plan/plan.h"
#include "tests/support/butterfly.h"

namespace kf::plan {
namespace {

limits::Limits limitsOf(double feed, double acceleration, double jerk) {
  limits::Limits l;
  l.feed = feed;
  l.x = l.y = {feed, acceleration, jerk};
  return l;
}

contour::Contour contourOf(curve::Curve c, bool closed = false) {
  return {"test", "", closed, {{std::move(c), "curve"}}};
}

Result<path::Path> pathOf(const contour::Contour& contour, std::size_t nodes) {
  RunControl control;
  path::Options options;
  options.targetNodes = nodes;
  options.gradeAtStops = true;
  return path::buildPath(contour, options, control);
}

Result<Plan> planOf(const path::Path& path, const limits::Limits& limits) {
  RunControl control;
  Options options;
  options.law = Law::jerk;
  return makePlan(path, limits, options, control);
}

// Closed forms of rest-to-rest motion (from memory of the usual formulas, recomputed with mpmath): v and a
// reached, a and v reached, neither reached. Rows held at both ends of a cell cost up to half a percent; none
// is ever faster.
TEST(JerkPlanAlongALine, IsNeverFasterThanTheClosedFormAndNearlyAsFast) {
  for (const auto& [h, v, a, j, seconds, slack] :
       {std::tuple{10.0, 3.0, 2.0, 3.0, 5.5, 0.005}, std::tuple{100.0, 50.0, 500.0, 5000.0, 2.2, 0.002},
        std::tuple{1.0, 50.0, 500.0, 5000.0, 0.185663553344511, 0.007}}) {
    auto path = pathOf(contourOf(curve::Line{{0, 0}, {h, 0}}), 1000);
    ASSERT_TRUE(path);
    auto plan = planOf(*path, limitsOf(v, a, j));
    ASSERT_TRUE(plan) << plan.error().message;
    EXPECT_GE(plan->time, seconds * (1 - 1e-6));
    EXPECT_LE(plan->time, seconds * (1 + slack));
    EXPECT_LE(plan->lowerBound, plan->time);
    EXPECT_GE(plan->lowerBound, 0.99 * plan->time);
    double sum = 0.0;
    for (double part : plan->timeByLimit) sum += part;
    EXPECT_NEAR(sum, plan->time, 1e-9 * plan->time);
  }
}

// A general LP solver found 10.258 s (bound 10.2578) and 3.484 s (bound 3.427) on 1,113 nodes.
TEST(JerkPlanAlongTheButterfly, IsAsFastAsAGeneralSolversAndAboveItsBound) {
  auto path = pathOf(contourOf(testing::butterfly(), true), 1113);
  ASSERT_TRUE(path);
  auto slow = planOf(*path, limitsOf(40, 500, 2e4)), fast = planOf(*path, limitsOf(300, 2500, 5e4));
  ASSERT_TRUE(slow && fast);
  EXPECT_LE(slow->time, 10.258);
  EXPECT_LE(fast->time, 3.484);
  EXPECT_GE(slow->lowerBound, 0.999 * slow->time);
  EXPECT_GE(fast->lowerBound, 0.94 * fast->time);  // slow bends leave the relaxation room
  RunControl control;
  auto without = makePlan(*path, limitsOf(300, 2500, 5e4), {}, control);
  ASSERT_TRUE(without);
  EXPECT_GT(fast->time, without->time);  // a limit more never helps
}

TEST(JerkPlan, TakesAsLongBackwardAndNoLongerUnderALargerLimit) {
  const contour::Contour drawn = contourOf(curve::EllipticArc{{0, 0}, {50, 0}, {0, 30}, 0.3, 4.0});
  auto there = pathOf(drawn, 800), back = pathOf(contour::reversed(drawn), 800);
  ASSERT_TRUE(there && back);
  auto a = planOf(*there, limitsOf(100, 1000, 2e4)), b = planOf(*back, limitsOf(100, 1000, 2e4)),
       c = planOf(*there, limitsOf(100, 1000, 4e4));
  ASSERT_TRUE(a && b && c);
  EXPECT_NEAR(a->time, b->time, 2e-4 * a->time);
  EXPECT_LT(c->time, a->time);
}

// Positions every 0.25 ms, differenced: no axis exceeds its speed or acceleration by 0.2 %, nor its jerk by 1
// %.
TEST(JerkPlan, KeepsItsLimitsWhenTheSampledMotionIsDifferenced) {
  const limits::Limits limits = limitsOf(100, 1000, 2e4);
  auto path =
      pathOf(contourOf(curve::EllipticArc{{0, 0}, {50, 0}, {0, 30}, 0.0, 2 * std::numbers::pi}, true), 2000);
  ASSERT_TRUE(path);
  auto plan = planOf(*path, limits);
  ASSERT_TRUE(plan);
  constexpr double kStep = 0.00025;
  std::array<double, 3> worst{};
  for (bool isX : {true, false}) {
    std::vector<double> d;
    for (double t = 0.0; t < plan->time; t += kStep) {
      const path::Sample p = path->sample(plan->schedule.atTime(t).s);
      d.push_back(isX ? p.x : p.y);
    }
    for (std::size_t order = 0; order < 3; ++order) {
      for (std::size_t i = 0; i + 1 < d.size(); ++i) d[i] = (d[i + 1] - d[i]) / kStep;
      d.pop_back();
      for (double value : d) worst[order] = std::max(worst[order], std::abs(value));
    }
  }
  EXPECT_LE(worst[0], 100 * 1.002);
  EXPECT_LE(worst[1], 1000 * 1.002);
  EXPECT_LE(worst[2], 2e4 * 1.01);
  EXPECT_GE(worst[2], 2e4 * 0.9);  // the limit is used
}

}  // namespace
}  // namespace kf::plan
