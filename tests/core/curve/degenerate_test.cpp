// Refusals, cusps, doubled poles and other degenerate curves.
// Lengths in mm.
#include <gtest/gtest.h>

#include <cmath>
#include <limits>
#include <numbers>

#include "core/curve/arc_length.h"
#include "tests/support/trig_curve.h"

namespace kf::curve {
namespace {

constexpr double kNan = std::numeric_limits<double>::quiet_NaN();

void expectRefused(const Result<Nurbs>& made, const std::string& word) {
  ASSERT_FALSE(made);
  EXPECT_EQ(made.error().code, ErrorCode::invalidArgument);
  EXPECT_NE(made.error().message.find(word), std::string::npos) << made.error().message;
}

// The rules for knots are those of ISO 10303-42 (b_spline_curve_with_knots): as many knots as poles + degree
// + 1, inner multiplicity at most the degree, weights positive.
TEST(MakeNurbs, RefusesWhatIsNoSpline) {
  const std::vector<Vec2> four = {{0, 0}, {1, 0}, {1, 1}, {0, 1}};
  const std::vector<double> good = {0, 0, 0, 0, 1, 1, 1, 1};
  EXPECT_TRUE(makeNurbs(3, good, four));
  expectRefused(makeNurbs(0, good, four), "degree");
  expectRefused(makeNurbs(26, good, four), "degree");
  expectRefused(makeNurbs(-3, good, four), "degree");
  expectRefused(makeNurbs(3, good, {{0, 0}, {1, 0}, {1, 1}}), "poles");
  expectRefused(makeNurbs(3, good, {}), "poles");
  expectRefused(makeNurbs(3, {0, 0, 0, 0, 1, 1, 1}, four), "knots");
  expectRefused(makeNurbs(3, {0, 0, 0, 0.5, 0.2, 1, 1, 1}, four), "less than");
  expectRefused(makeNurbs(3, {0, 0, 0, 0, kNan, 1, 1, 1}, four), "finite");
  expectRefused(makeNurbs(3, {0, 0, 0, 0, 0, 0, 0, 0}, four), "range");
  expectRefused(makeNurbs(3, good, {{0, 0}, {1, kNan}, {1, 1}, {0, 1}}), "finite");
  expectRefused(makeNurbs(3, good, {{0, 0}, {HUGE_VAL, 0}, {1, 1}, {0, 1}}), "finite");
  expectRefused(makeNurbs(3, good, four, {1, 1, 1}), "weights");
  expectRefused(makeNurbs(3, good, four, {1, 0, 1, 1}), "weight");
  expectRefused(makeNurbs(3, good, four, {1, -2, 1, 1}), "weight");
  expectRefused(makeNurbs(3, good, four, {1, kNan, 1, 1}), "weight");
  expectRefused(makeNurbs(1, {0, 0, 1, 1, 2, 2}, four), "tears");
}

TEST(MakePeriodicNurbs, RefusesWhatIsNoSpline) {
  const std::vector<Vec2> three = {{0, 0}, {1, 0}, {0, 1}};
  EXPECT_TRUE(makePeriodicNurbs(2, {0, 1, 2, 3}, three));
  EXPECT_FALSE(makePeriodicNurbs(2, {0, 1, 2}, three));
  EXPECT_FALSE(makePeriodicNurbs(2, {0, 0, 0, 0}, three));
  EXPECT_FALSE(makePeriodicNurbs(2, {0, 2, 1, 3}, three));
  EXPECT_FALSE(makePeriodicNurbs(0, {0, 1, 2, 3}, three));
  EXPECT_FALSE(makePeriodicNurbs(2, {0, 1, 2, 3}, {}));
  EXPECT_FALSE(makePeriodicNurbs(2, {0, kNan, 2, 3}, three));
  EXPECT_FALSE(makePeriodicNurbs(2, {0, 1, 2, 3}, three, {1, 0, 1}));
}

TEST(InterpolateCubic, RefusesEqualNeighboursAndTooFewPoints) {
  expectRefused(interpolateCubic({{0, 0}}), "two");
  expectRefused(interpolateCubic({}), "two");
  expectRefused(interpolateCubic({{0, 0}, {1, 1}, {1, 1}, {2, 0}}), "points 2 and 3");
  expectRefused(interpolateCubic({{0, 0}, {kNan, 1}}), "finite");
  const auto line = interpolateCubic({{0, 0}, {3, 4}});
  ASSERT_TRUE(line);
  EXPECT_NEAR(totalLength(*line), 5.0, 1e-14);
  EXPECT_TRUE(interpolateCubic({{0, 0}, {1, 1}, {0, 0}}));  // there and back, open
}

TEST(ArcLength, RefusesParametersOutsideTheCurve) {
  const Curve c = testing::bezier({{0, 0}, {1, 2}, {3, 0}});
  for (const auto& [a, b] : {std::pair{-0.1, 0.5}, std::pair{0.5, 1.1}, std::pair{0.7, 0.3},
                             std::pair{kNan, 0.5}, std::pair{0.1, kNan}}) {
    const auto length = arcLength(c, a, b);
    ASSERT_FALSE(length);
    EXPECT_EQ(length.error().code, ErrorCode::invalidArgument);
  }
  EXPECT_EQ(arcLength(c, 0.4, 0.4)->length, 0.0);
}

// x = t^2, y = t^3 on [-1, 1]: a cusp at 0; each branch has length (13 sqrt 13 - 8) / 27 (Neile, 1657; from
// memory, recomputed).
TEST(InnerCusp, HasItsLengthAndInverse) {
  const Curve c = testing::bezierFromPowers({1, -4, 4, 0}, {-1, 6, -12, 8});
  const double branch = (13 * std::sqrt(13.0) - 8) / 27;
  const auto whole = arcLength(c, 0, 1);
  ASSERT_TRUE(whole) << whole.error().message;
  EXPECT_NEAR(whole->length, 2 * branch, 1e-11);
  EXPECT_FALSE(bend(c.jet(0.5)).regular);
  EXPECT_EQ(bend(c.jet(0.5)).k, 0.0);
  const auto u = parameterAtLength(c, 0.0, branch);
  ASSERT_TRUE(u);
  EXPECT_NEAR(*u, 0.5, 1e-5);  // the speed vanishes there: s ~ (u - 1/2)^2
}

TEST(DoubledPoles, DoNotBreakLengthOrClosestPoint) {
  const Curve c = testing::bezier({{0, 0}, {0, 0}, {10, 10}, {10, 10}});  // a line with speed 0 at its ends
  EXPECT_NEAR(totalLength(c), std::sqrt(200.0), 1e-12);
  EXPECT_NEAR(closestPoint(c, {5, 5}).distance, 0.0, 1e-9);
  EXPECT_NEAR(closestPoint(c, {-3, -4}).distance, 5.0, 1e-12);
  const Curve point = testing::bezier({{2, 3}, {2, 3}, {2, 3}});
  const auto none = arcLength(point, 0, 1);
  ASSERT_TRUE(none);
  EXPECT_EQ(none->length, 0.0);
  EXPECT_NEAR(closestPoint(point, {2, 5}).distance, 2.0, 1e-15);
  const auto u = parameterAtLength(point, 0.0, 1.0);
  ASSERT_TRUE(u);
  EXPECT_TRUE(std::isfinite(*u));
}

TEST(PointLikeLine, HasNoLengthAndAClosestPoint) {
  const Curve c(Line{{1, 1}, {1, 1}});
  EXPECT_EQ(totalLength(c), 0.0);
  const ClosestPoint found = closestPoint(c, {4, 5});
  EXPECT_NEAR(found.distance, 5.0, 1e-15);
  EXPECT_TRUE(found.u >= 0.0 && found.u <= 1.0);
  const auto u = parameterAtLength(c, 0.0, 1.0);
  ASSERT_TRUE(u);
  EXPECT_EQ(*u, 1.0);
}

// Multiple end knots beyond degree + 1 leave empty spans at the ends; extra inner poles are out of reach.
TEST(UnusualKnots, AreEvaluatedInTheirRange) {
  // degree 1, the first knot three times: the first pole is never reached.
  const auto n = makeNurbs(1, {0, 0, 0, 1, 1}, {{9, 9}, {0, 0}, {1, 0}});
  if (n) {
    const Curve c(*n);
    EXPECT_NEAR(distance(c.point(0.5), {0.5, 0}), 0.0, 1e-15);
    EXPECT_NEAR(totalLength(c), 1.0, 1e-15);
  }
}

TEST(Arcs, OfAFullTurnEndWhereTheyStart) {
  for (double sweep : {2 * std::numbers::pi, -2 * std::numbers::pi}) {
    const Curve c(Arc{{3, 4}, 7.0, 1.25, sweep});
    EXPECT_NEAR(distance(c.startPoint(), c.endPoint()), 0.0, 1e-14);
    EXPECT_NEAR(bend(c.jet(0.3)).k, sweep > 0 ? 1 / 7.0 : -1 / 7.0, 1e-15);
    const Box box = c.bounds();
    EXPECT_NEAR(box.low.x, -4.0, 1e-14);
    EXPECT_NEAR(box.high.x, 10.0, 1e-14);
    EXPECT_NEAR(box.low.y, -3.0, 1e-14);
    EXPECT_NEAR(box.high.y, 11.0, 1e-14);
  }
}

// Curvature of a straight spline is rounding only, and the slope never overflows at odd speeds.
TEST(Bend, SurvivesTinyAndHugeParameterSpeeds) {
  for (double speed : {1e-150, 1e-12, 1e12, 1e150}) {
    // A circle of radius 2 at parameter speed v: c' = v t, c'' = v^2/2 n, c''' = -v^3/4 t.
    const Jet j{{2, 0}, {0, speed}, {-speed * speed / 2, 0}, {0, -speed * speed * speed / 4}};
    const Bend b = bend(j);
    EXPECT_NEAR(b.k, 0.5, 1e-15) << speed;
    if (speed * speed * speed > 0.0 && std::isfinite(speed * speed * speed)) {
      EXPECT_NEAR(b.dkds, 0.0, 1e-15);
    }
  }
}

}  // namespace
}  // namespace kf::curve
