// Caps on speed: control, bends, cut; the lower speed; and moves beside the contour.
// mm, s.
#include <gtest/gtest.h>

#include <cmath>
#include <numbers>

#include "core/plan/cap_formulas.h"
#include "core/plan/low_speed.h"
#include "core/plan/moves.h"
#include "core/plan/plan.h"

namespace kf::plan {
namespace {

constexpr double kPi = std::numbers::pi;
constexpr double kDegree = kPi / 180.0;

path::Path pathOf(std::vector<curve::Curve> curves, bool closed) {
  contour::Contour contour;
  contour.closed = closed;
  for (curve::Curve& c : curves) contour.segments.push_back({std::move(c), ""});
  RunControl control;
  auto built = path::buildPath(contour, {}, control);
  EXPECT_TRUE(built.ok());
  return *built;
}

limits::Limits open() {
  limits::Limits limits;
  limits.feed = 100.0;
  limits.x = {1e6, 1e6, {}};
  limits.y = limits.x;
  return limits;
}

Caps capsOnCircle(double radius, double sweep, const limits::Limits& limits) {
  return speedCaps(pathOf({curve::Arc{{0, 0}, radius, 0.0, sweep}}, false), limits);
}

// Yeh & Hsu 2002 (from memory): R 25, e 0.005, 500 blocks/s gives 29998.4999624981 mm/min.
TEST(Caps, ChordErrorAndBlockRate) {
  EXPECT_NEAR(chordSpeed(25.0, 0.005, 0.002) * 60.0, 29998.4999624981, 1e-9 * 3e4);
  // 0.2 mm blocks at 250 a second: 3000 mm/min (arithmetic).
  limits::Limits limits = open();
  limits.blockLength = 0.2;
  limits.blockPeriod = 1.0 / 250.0;
  const Caps caps = capsOnCircle(30.0, 2.0, limits);
  EXPECT_NEAR(std::sqrt(caps.q[3]) * 60.0, 3000.0, 1e-9 * 3000);
  EXPECT_EQ(caps.limitedBy[3], LimitName::blockPeriod);
}

// R 10, v 100, K 50: v^2 / (2 R K^2) = 0.200, exact R (1 - 1 / sqrt(1 + (v / (R K))^2)) = 0.194 (derived).
TEST(Caps, FirstOrderServoLag) {
  EXPECT_NEAR(std::sqrt(servoLagQ(0.1, 0.2, 50.0)), 100.0, 1e-12);
  const double exact = 10.0 * (1.0 - 1.0 / std::sqrt(1.0 + std::pow(100.0 / (10.0 * 50.0), 2)));
  EXPECT_NEAR(exact, 0.194, 5e-4);
  EXPECT_LT(exact, 0.2) << "the cap is on the safe side";
}

// The circle driven through the loop itself, by a fourth-order integration of both axes.
double simulatedRadius(double radius, double v, double position, double velocity) {
  const double w = v / radius, h = 1e-5;
  double x[4] = {radius, 0.0, 0.0, v};  // x, y, x', y'
  const auto slope = [&](double t, const double* s, double* d) {
    d[0] = s[2];
    d[1] = s[3];
    d[2] = velocity * (position * (radius * std::cos(w * t) - s[0]) - s[2]);
    d[3] = velocity * (position * (radius * std::sin(w * t) - s[1]) - s[3]);
  };
  double t = 0.0;
  for (; t < 1.5; t += h) {
    double k[4][4], y[4];
    slope(t, x, k[0]);
    for (int stage = 1; stage < 4; ++stage) {
      const double f = stage == 3 ? h : 0.5 * h;
      for (int i = 0; i < 4; ++i) y[i] = x[i] + f * k[stage - 1][i];
      slope(t + f, y, k[stage]);
    }
    for (int i = 0; i < 4; ++i) x[i] += h / 6.0 * (k[0][i] + 2 * k[1][i] + 2 * k[2][i] + k[3][i]);
  }
  return std::hypot(x[0], x[1]);
}

TEST(Caps, SecondOrderServoLagMatchesASimulatedLoop) {
  for (const auto& [position, velocity] :
       {std::pair{50.0, 400.0}, std::pair{50.0, 120.0}, std::pair{50.0, 60.0}}) {
    const double v = std::sqrt(servoLagQ(0.1, 0.05, position, velocity));
    EXPECT_NEAR(std::abs(simulatedRadius(10.0, v, position, velocity) - 10.0), 0.05, 1e-6) << velocity;
  }
  // With a very fast velocity loop it is the exact first-order error.
  const double v = std::sqrt(servoLagQ(0.1, 0.194193243, 50.0, 1e7));
  EXPECT_NEAR(v, 100.0, 0.01);
}

// Clothoid at constant speed: normal jerk v^3 / A^2; v 20, A 100 gives 0.8 (derived). Circle: v^3 k^2.
TEST(Caps, NormalJerk) {
  EXPECT_NEAR(bendJerkSpeed(0.0, 1.0 / (100.0 * 100.0), 0.8), 20.0, 1e-12);
  EXPECT_NEAR(bendJerkSpeed(0.1, 0.0, 1000.0), std::cbrt(1000.0 / 0.01), 1e-12);
  limits::Limits limits = open();
  limits.normalJerk = 1000.0;
  const Caps caps = capsOnCircle(10.0, 1.0, limits);
  EXPECT_NEAR(std::sqrt(caps.q[2]), std::cbrt(1e5), 1e-9);
  EXPECT_EQ(caps.limitedBy[2], LimitName::normalJerk);
}

// n = 1000 vc / (pi D), vf = n z fz (trade practice); N = 12 V / (pi D): SME speed and feed chapter.
TEST(Cut, SpindleSpeedAndFeedPerTooth) {
  const double n = spindleSpeed(100.0, 10.0);
  EXPECT_NEAR(n, 3183.09886183791, 1e-9);
  EXPECT_NEAR(spindleSpeed(100.0 * 0.3048, 12.7), 763.943726841098, 1e-9);
  limits::Limits limits = open();
  limits.teeth = 4;
  limits.spindleRpm = n;
  limits.feedPerTooth = 0.05;
  const Caps caps = capsOnCircle(50.0, 1.0, limits);
  EXPECT_NEAR(std::sqrt(caps.q[1]) * 60.0, 636.619772367581, 1e-9);
  EXPECT_EQ(caps.limitedBy[1], LimitName::chipLoad);
}

// El-Hofy: cos = 1 - 2 ae / D; D 10, ae 1 and 2: 36.869897645844 and 53.130102354156 degrees, chip 0.6 and
// 0.8.
TEST(Cut, EngagementAndChipThickness) {
  EXPECT_NEAR(engagementAngle(1.0, 10.0) / kDegree, 36.869897645844, 1e-11);
  EXPECT_NEAR(engagementAngle(2.0, 10.0) / kDegree, 53.130102354156, 1e-11);
  EXPECT_NEAR(chipThicknessRatio(1.0, 10.0), 0.6, 1e-14);
  EXPECT_NEAR(chipThicknessRatio(2.0, 10.0), 0.8, 1e-14);
  EXPECT_EQ(chipThicknessRatio(5.0, 10.0), 1.0);
  EXPECT_EQ(chipThicknessRatio(8.0, 10.0), 1.0);
  // Walls of R 8, r 5, ae 1: 60.0 degrees concave, 29.6 convex (derived); centre paths of R 3 and 13.
  EXPECT_NEAR(engagementAngle(effectiveRadialDepth(1.0, 1.0 / 3.0, 5.0), 10.0) / kDegree, 60.0, 1e-11);
  EXPECT_NEAR(engagementAngle(effectiveRadialDepth(1.0, -1.0 / 13.0, 5.0), 10.0) / kDegree, 29.6, 0.05);
  for (double wall : {6.0, 8.0, 30.0}) {
    EXPECT_NEAR(effectiveRadialDepth(1.0, 1.0 / (wall - 5.0), 5.0),
                std::min((2 * wall - 1) / (2 * (wall - 5)), 10.0), 1e-12);
    EXPECT_NEAR(effectiveRadialDepth(1.0, -1.0 / (wall + 5.0), 5.0), (2 * wall + 1) / (2 * (wall + 5)),
                1e-12);
  }
}

// Centre feed on an arc of R 20 with r 5: inside x 0.75 = (R - r) / R, outside x 1.25 (trade practice).
TEST(Cut, FeedAtTheWall) {
  limits::Limits limits = open();
  limits.toolDiameter = 10.0;
  limits.feedAtWall = true;
  limits.side = limits::Side::left;  // inside of a counter-clockwise wall: the centre runs on R 15
  EXPECT_NEAR(std::sqrt(capsOnCircle(15.0, 2.0, limits).q[1]), 75.0, 1e-9);
  limits.side = limits::Side::right;  // outside: R 25
  EXPECT_NEAR(std::sqrt(capsOnCircle(25.0, 2.0, limits).q[1]), 125.0, 1e-9);
  EXPECT_NEAR(std::sqrt(capsOnCircle(5.0, 2.0, limits).q[1]), 200.0, 1e-9)
      << "rolling around a corner: at most twice";
  limits.side = limits::Side::left;  // the same arcs driven clockwise swap
  EXPECT_NEAR(std::sqrt(capsOnCircle(25.0, -2.0, limits).q[1]), 125.0, 1e-9);
  limits.feedAtWall = false;
  EXPECT_NEAR(std::sqrt(capsOnCircle(15.0, 2.0, limits).q[1]), 100.0, 1e-12);
}

TEST(Cut, ThinChipsAllowMoreAndConcaveWallsLess) {
  limits::Limits limits = open();
  limits.feed = 1000.0;
  limits.toolDiameter = 10.0;
  limits.side = limits::Side::left;
  limits.radialDepth = 1.0;
  limits.teeth = 2;
  limits.spindleRpm = 6000.0;
  limits.chipThickness = 0.06;
  const Caps straight = speedCaps(pathOf({curve::Line{{0, 0}, {50, 0}}}, false), limits);
  EXPECT_NEAR(std::sqrt(straight.q[1]), 0.06 / 0.6 * 2 * 100.0, 1e-9);
  const Caps concave = capsOnCircle(3.0, 2.0, limits);
  EXPECT_NEAR(std::sqrt(concave.q[1]), 0.06 / std::sin(60 * kDegree) * 2 * 100.0, 1e-9);
  EXPECT_EQ(concave.limitedBy[1], LimitName::chipLoad);
}

// From rest with a 500 to v 50 and back over 100 mm: below 20 mm/s for 0.4 mm and 0.04 s at either end.
TEST(LowSpeed, ListsWhereTheLimitsKeepThePlanBelow) {
  limits::Limits limits = open();
  limits.feed = 50.0;
  limits.x.acceleration = limits.y.acceleration = 500.0;
  const path::Path path = pathOf({curve::Line{{0, 0}, {100, 0}}}, false);
  RunControl control;
  const auto plan = makePlan(path, limits, {}, control);
  ASSERT_TRUE(plan.ok());
  EXPECT_NEAR(plan->time, 2.1, 1e-9) << "trapezoid";
  const auto low = lowSpeedStretches(plan->schedule, 20.0);
  ASSERT_EQ(low.size(), 2u);
  EXPECT_EQ(low[0].from, 0.0);
  EXPECT_NEAR(low[0].to, 0.4, 1e-9);
  EXPECT_NEAR(low[0].time, 0.04, 1e-9);
  EXPECT_NEAR(low[1].from, 99.6, 1e-9);
  EXPECT_NEAR(low[1].to, 100.0, 1e-9);
  EXPECT_NEAR(low[1].time, 0.04, 1e-9);
  EXPECT_EQ(low[0].slowest, 0.0);
  EXPECT_EQ(low[0].limitedBy, LimitName::axisAccelerationX);
  EXPECT_EQ(lowSpeedStretches(plan->schedule, 60.0).size(), 1u);
}

TEST(Moves, RapidAndEntryTimes) {
  // h 100, v 50, a 500: 2.1 s; h 10, v 100, a 1000: 0.2 s (closed forms).
  EXPECT_NEAR(trapezoidTime(100, 50, 500), 2.1, 1e-14);
  EXPECT_NEAR(trapezoidTime(10, 100, 1000), 0.2, 1e-14);
  limits::Limits limits;
  limits.x = {100.0, 500.0, {}};
  limits.y = limits.x;
  // 30 x 40 with axes at v 100, a 500: path v 125, a 625, T 0.6 s.
  EXPECT_NEAR(rapidTime(30, 40, limits), 0.6, 1e-12);
  limits.rapidSpeed = 50.0;
  EXPECT_NEAR(rapidTime(30, 40, limits), 1.0 + 50.0 / 625.0, 1e-12);
  EXPECT_EQ(rapidTime(0, 0, limits), 0.0);
  EXPECT_EQ(entryTime(limits), 0.0);
  limits.plungeFeed = 5.0;
  limits.plungeDepth = 12.0;
  limits.pierceTime = 0.7;
  EXPECT_NEAR(entryTime(limits), 2.4 + 2.4 + 0.7, 1e-12);
  limits.retractSpeed = 60.0;
  EXPECT_NEAR(entryTime(limits), 2.4 + 0.2 + 0.7, 1e-12);
}

}  // namespace
}  // namespace kf::plan
