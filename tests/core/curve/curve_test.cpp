// Points, derivatives and cuts of every kind of curve.
// Lengths in mm.
#include "core/curve/curve.h"

#include <gtest/gtest.h>

#include "core/curve/arc_length.h"

namespace kf::curve {
namespace {

// The NURBS Book, example 4.1 (from memory; recomputed with scipy).
TEST(RationalSpline, GivesThePointOfTheTextbookExample) {
  const auto spline =
      makeNurbs(2, {0, 0, 0, 1, 2, 3, 3, 3}, {{0, 0}, {1, 1}, {3, 2}, {4, 1}, {5, -1}}, {1, 4, 1, 1, 1});
  ASSERT_TRUE(spline);
  const Vec2 p = Curve(*spline).point(1.0);
  EXPECT_NEAR(p.x, 7.0 / 5.0, 1e-15);
  EXPECT_NEAR(p.y, 6.0 / 5.0, 1e-15);
}

TEST(RationalSpline, QuarterCircleHasTheRadiusAsCurvature) {
  const auto spline = makeNurbs(2, {0, 0, 0, 1, 1, 1}, {{1, 0}, {1, 1}, {0, 1}}, {1, 1, 2});
  ASSERT_TRUE(spline);
  const Curve c(*spline);
  EXPECT_NEAR(c.point(0.5).x, 0.6, 1e-15);
  EXPECT_NEAR(c.point(0.25).y, 8.0 / 17.0, 1e-15);
  for (double u : {0.0, 0.1, 0.5, 0.9, 1.0}) {
    const Bend b = bend(c.jet(u));
    EXPECT_NEAR(b.k, 1.0, 1e-13);
    EXPECT_NEAR(b.dkds, 0.0, 1e-12);
  }
  EXPECT_NEAR(totalLength(c), 1.5707963267948966, 1e-14);
}

// DLMF 19.30(i), recomputed with mpmath.
TEST(EllipseLength, AgreesWithTheEllipticIntegral) {
  const Curve e(EllipticArc{{0, 0}, {50, 0}, {0, 30}, 0.0, 6.283185307179586});
  EXPECT_NEAR(totalLength(e), 255.26998863398128, 1e-11);
}

TEST(TrimmedSpline, IsTheSameCurve) {
  const auto spline =
      makeNurbs(3, {0, 0, 0, 0, 1, 2, 2, 3, 3, 3, 3},
                {{0, 0}, {1, 2}, {3, 3}, {4, 0}, {6, 1}, {7, 3}, {9, 0}}, {1, 2, 1, 0.5, 1, 3, 1});
  ASSERT_TRUE(spline);
  const Curve whole(*spline), part = whole.trimmed(0.3, 2.6);
  for (double u = 0.3; u <= 2.6; u += 0.1) {
    const Jet a = whole.jet(u), b = part.jet(u);
    EXPECT_NEAR(distance(a.p, b.p), 0.0, 1e-13);
    EXPECT_NEAR(norm(a.d2 - b.d2), 0.0, 1e-10);
  }
}

TEST(CurveThroughPoints, PassesThroughThemAndClosesSmoothly) {
  const std::vector<Vec2> points = {{0, 0}, {10, 2}, {12, 9}, {4, 12}, {-3, 7}, {0, 0}};
  const auto spline = interpolateCubic(points);
  ASSERT_TRUE(spline);
  const Curve c(*spline);
  for (Vec2 p : points) EXPECT_NEAR(closestPoint(c, p).distance, 0.0, 1e-12);
  const Jet start = c.jet(c.first()), end = c.jet(c.last(), Side::left);
  EXPECT_NEAR(norm(start.d1 - end.d1), 0.0, 1e-12);
  EXPECT_NEAR(norm(start.d2 - end.d2), 0.0, 1e-12);
}

}  // namespace
}  // namespace kf::curve
