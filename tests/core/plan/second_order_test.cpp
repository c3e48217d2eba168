// The plan under speed and acceleration limits.
// mm, s.
#include <gtest/gtest.h>

#include <cmath>
#include <numbers>
#include <tuple>

#include "core/plan/plan.h"
#include "tests/support/butterfly.h"

namespace kf::plan {
namespace {

using curve::Arc;
using curve::Line;

limits::Limits limitsOf(double feed, double acceleration) {
  limits::Limits l;
  l.feed = feed;
  l.x = {feed, acceleration, std::nullopt};
  l.y = {feed, acceleration, std::nullopt};
  return l;
}

Result<Plan> planOf(const contour::Contour& contour, const limits::Limits& limits, std::size_t nodes) {
  RunControl control;
  path::Options options;
  options.targetNodes = nodes;
  auto path = path::buildPath(contour, options, control);
  if (!path) return path.error();
  return makePlan(*path, limits, {}, control);
}

contour::Contour contourOf(curve::Curve c, bool closed = false) {
  return {"test", "", closed, {{std::move(c), "curve"}}};
}

// Closed form: h/v + v/a.
TEST(PlanAlongALine, TakesTheTimeOfATrapezoid) {
  auto plan = planOf(contourOf(Line{{0, 0}, {100, 0}}), limitsOf(50, 500), 2000);
  ASSERT_TRUE(plan) << plan.error().message;
  EXPECT_NEAR(plan->time, 2.1, 1e-5);
  EXPECT_LE(plan->lowerBound, plan->time);
  EXPECT_GE(plan->lowerBound, plan->time * (1 - 1e-9));
}

// Closed form: 2 sqrt(h/a).
TEST(PlanAlongALine, TakesTheTimeOfATriangle) {
  auto plan = planOf(contourOf(Line{{0, 0}, {100, 0}}), limitsOf(1000, 500), 2000);
  ASSERT_TRUE(plan);
  EXPECT_NEAR(plan->time, 0.894427190999916, 1e-5);
}

// L/v + v/a with v^2 = centripetal R; closed form of circular motion.
TEST(PlanAlongACircle, AddsTheRampsToTheLap) {
  limits::Limits l = limitsOf(1e4, 1e6);
  l.centripetalAcceleration = 1000;
  l.tangentialAcceleration = 1000;
  auto plan = planOf(contourOf(Arc{{0, 0}, 10, 0, 2 * std::numbers::pi}, true), l, 2000);
  ASSERT_TRUE(plan);
  EXPECT_NEAR(plan->time, 0.728318530717959, 1e-5);
}

// Reference times from a general LP solver on 1,113 nodes: 10.212 s and 2.827 s. On finer nodes the time
// falls a little (10.1937 and 2.8065 at 1e6 nodes), because rows held at both ends of a cell are a little
// stricter than the motion.
TEST(PlanAlongTheButterfly, AgreesWithALinearProgram) {
  const contour::Contour butterfly = contourOf(testing::butterfly(), true);
  for (const auto& [feed, acceleration, seconds] :
       {std::tuple{40.0, 500.0, 10.212}, std::tuple{300.0, 2500.0, 2.827}}) {
    auto plan = planOf(butterfly, limitsOf(feed, acceleration), 1113);
    ASSERT_TRUE(plan) << plan.error().message;
    EXPECT_NEAR(plan->time, seconds, seconds * 1e-3);
    EXPECT_LE(plan->lowerBound, plan->time);
    EXPECT_GE(plan->lowerBound, plan->time * (1 - 5e-4));
  }
}

TEST(PlanAlongTheButterfly, ConvergesAsNodesAreAdded) {
  const contour::Contour butterfly = contourOf(testing::butterfly(), true);
  double before = HUGE_VAL;
  for (std::size_t nodes : {1000, 4000, 16000, 64000}) {
    auto plan = planOf(butterfly, limitsOf(300, 2500), nodes);
    ASSERT_TRUE(plan);
    EXPECT_LT(plan->time, before);
    EXPECT_GE(plan->lowerBound, plan->time * (1 - 5e-4));
    before = plan->time;
  }
  EXPECT_NEAR(before, 2.8065, 2.8065e-3);
}

}  // namespace
}  // namespace kf::plan
