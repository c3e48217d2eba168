// Length, area, turning and joints of whole contours.
// Lengths in mm, angles in rad.
#include "core/contour/contour.h"

#include <gtest/gtest.h>

#include <cmath>
#include <numbers>

#include "core/curve/arc_length.h"
#include "core/numeric/gauss_legendre.h"
#include "tests/support/butterfly.h"
#include "tests/support/random_spline.h"
#include "tests/support/trig_curve.h"

namespace kf::contour {
namespace {

using curve::Arc;
using curve::Curve;
using curve::Line;
using curve::Vec2;
using std::numbers::pi;

Contour contourOf(std::vector<Curve> curves, bool closed = true) {
  Contour c;
  c.name = "test";
  c.closed = closed;
  for (Curve& each : curves) c.segments.push_back({std::move(each), "curve"});
  return c;
}

Contour trigContour(const testing::TrigCurve& t, int parts) {
  std::vector<Curve> curves;
  for (int i = 0; i < parts; ++i)
    curves.push_back(testing::rationalStretch(t, 2 * pi * i / parts, 2 * pi * (i + 1) / parts));
  return contourOf(std::move(curves));
}

// Integral of k ds over the segments plus the turns at the joints.
double totalTurn(const Contour& contour, bool absolute = false) {
  double sum = 0.0;
  for (const Segment& segment : contour.segments) {
    std::vector<double> cuts{segment.curve.first()};
    for (double u : segment.curve.breaks()) cuts.push_back(u);
    cuts.push_back(segment.curve.last());
    const auto rate = [&](double u) {
      const curve::Jet j = segment.curve.jet(u);
      const double k = curve::bend(j).k * curve::norm(j.d1);
      return absolute ? std::abs(k) : k;
    };
    for (std::size_t i = 0; i + 1 < cuts.size(); ++i) {
      constexpr int kParts = 256;
      for (int p = 0; p < kParts; ++p) {
        const double w = (cuts[i + 1] - cuts[i]) / kParts;
        sum += numeric::gauss10(rate, cuts[i] + p * w, cuts[i] + (p + 1) * w);
      }
    }
  }
  for (const Joint& joint : findJoints(contour)) sum += absolute ? std::abs(joint.turn) : joint.turn;
  return sum;
}

Contour stadium(double straight, double r) {
  const double h = straight / 2;
  return contourOf({Line{{-h, -r}, {h, -r}}, Arc{{h, 0}, r, -pi / 2, pi}, Line{{h, r}, {-h, r}},
                    Arc{{-h, 0}, r, pi / 2, pi}});
}

// Three arcs of radius `width` about the corners of an equilateral triangle.
Contour reuleaux(double width) {
  const Vec2 a{0, 0}, b{width, 0}, c{width / 2, width * std::sqrt(3.0) / 2};
  return contourOf(
      {Arc{c, width, -2 * pi / 3, pi / 3}, Arc{a, width, 0, pi / 3}, Arc{b, width, 2 * pi / 3, pi / 3}});
}

// Computed: 100 straight, r 20.
TEST(Stadium, HasItsLengthAreaAndCurvatureSteps) {
  const Contour s = stadium(100, 20);
  EXPECT_NEAR(length(s), 325.663706143592, 1e-12 * 326);
  EXPECT_NEAR(signedArea(s), 5256.63706143592, 1e-12 * 5257);
  EXPECT_NEAR(signedArea(reversed(s)), -5256.63706143592, 1e-12 * 5257);
  const auto joints = findJoints(s);
  ASSERT_EQ(joints.size(), 4u);
  for (std::size_t i = 0; i < 4; ++i) {
    EXPECT_EQ(joints[i].kind, JointKind::curvatureStep);
    EXPECT_EQ(joints[i].before, i);
    EXPECT_NEAR(joints[i].curvatureChange, i % 2 == 0 ? 0.05 : -0.05, 1e-15);
    EXPECT_NEAR(joints[i].turn, 0.0, 1e-15);
    EXPECT_NEAR(joints[i].gap, 0.0, 1e-13);
  }
  EXPECT_NEAR(joints[0].s, 100.0, 1e-12);
  EXPECT_NEAR(joints[3].s, 325.663706143592, 1e-10);
  EXPECT_NEAR(totalTurn(s), 2 * pi, 1e-12);
}

// Barbier: a curve of constant width has length pi times the width. The area computed.
TEST(ReuleauxTriangle, HasBarbiersLengthAndThreeBreaks) {
  const Contour r = reuleaux(50);
  EXPECT_NEAR(length(r), 50 * pi, 1e-11);
  EXPECT_NEAR(signedArea(r), 1761.92730752614, 1e-10);
  const auto joints = findJoints(r);
  ASSERT_EQ(joints.size(), 3u);
  for (const Joint& joint : joints) {
    EXPECT_EQ(joint.kind, JointKind::tangentBreak);
    EXPECT_NEAR(joint.turn, pi / 3, 1e-14);  // inner angle 120 degrees
  }
  EXPECT_NEAR(totalTurn(r), 2 * pi, 1e-12);
  EXPECT_NEAR(totalTurn(r, true), 2 * pi, 1e-12);  // convex (Fenchel)
}

// Computed: pi a b; 3 pi a^2 / 2; 3 pi a^2 / 8.
TEST(SignedArea, OfNamedCurves) {
  EXPECT_NEAR(signedArea(trigContour(testing::ellipse(50, 30), 4)), 1500 * pi, 1e-11 * 1500 * pi);
  EXPECT_NEAR(signedArea(contourOf({curve::EllipticArc{{7, -9}, {50, 0}, {0, 30}, 0.7, 2 * pi}})), 1500 * pi,
              1e-11 * 1500 * pi);
  EXPECT_NEAR(signedArea(trigContour(testing::cardioid(5), 4)), 37.5 * pi, 1e-11 * 37.5 * pi);
  EXPECT_NEAR(signedArea(trigContour(testing::astroid(8), 4)), 24 * pi, 1e-11 * 24 * pi);
  EXPECT_NEAR(signedArea(contourOf({Line{{0, 0}, {3, 0}}, Line{{3, 0}, {3, 4}}, Line{{3, 4}, {0, 0}}})), 6.0,
              1e-14);
  EXPECT_EQ(signedArea(contourOf({Line{{0, 0}, {3, 0}}, Line{{3, 0}, {3, 4}}}, false)), 0.0);
}

TEST(SignedArea, IsKeptFarFromTheOrigin) {
  Contour c = stadium(100, 20);
  for (Segment& s : c.segments) s.curve = s.curve.transformed(curve::Affine2::translation({1e6, -1e6}));
  EXPECT_NEAR(signedArea(c), 5256.63706143592, 1e-6);
}

// Weights a million apart: the conic with P = (0,0)(50,80)(100,0), w = (1, r, 1). Its area over the chord
// follows from the standard form (computed with mpmath 1.2.1: quadrature of y dx at 30 digits).
TEST(SignedArea, HoldsForSharpConics) {
  for (const auto& [r, area] : {std::pair{1e-3, 6.27519472130264877}, std::pair{1.0, 8000.0 / 3},
                                std::pair{1e3, 3999.97359634955637}, std::pair{1e6, 3999.99999994596537}}) {
    const Contour c =
        contourOf({Curve(testing::bezier({{0, 0}, {50, 80}, {100, 0}}, {1, r, 1})), Line{{100, 0}, {0, 0}}});
    EXPECT_NEAR(-signedArea(c), area, 1e-9 * area) << "weight " << r;
  }
}

// Hopf: the tangent of a simple closed curve turns once; limacon r = 1 + 2 cos t: twice (computed).
TEST(TurningNumber, IsOneWhenSimpleAndTwoForALimacon) {
  EXPECT_NEAR(totalTurn(trigContour(testing::ellipse(50, 30), 4)), 2 * pi, 1e-12);
  EXPECT_NEAR(totalTurn(trigContour(testing::ellipse(50, 30), 4), true), 2 * pi, 1e-12);
  EXPECT_NEAR(totalTurn(trigContour(testing::limacon(), 4)), 4 * pi, 1e-11);
  EXPECT_NEAR(totalTurn(reversed(trigContour(testing::limacon(), 4))), -4 * pi, 1e-11);
  const double butterfly = totalTurn(contourOf({Curve(testing::butterfly())}));
  EXPECT_NEAR(std::abs(butterfly), 2 * pi, 1e-6);
  EXPECT_GT(totalTurn(contourOf({Curve(testing::butterfly())}), true), 2 * pi + 1);
}

TEST(FindJoints, NamesTurnsAndSteps) {
  for (double degrees : {-179.0, -135.0, -90.0, -30.0, -1.0, 1.0, 30.0, 90.0, 135.0, 179.0}) {
    const double turn = degrees * pi / 180;
    const Contour c =
        contourOf({Line{{-10, 0}, {0, 0}}, Line{{0, 0}, {10 * std::cos(turn), 10 * std::sin(turn)}}}, false);
    const auto joints = findJoints(c);
    ASSERT_EQ(joints.size(), 1u);
    EXPECT_EQ(joints[0].kind, JointKind::tangentBreak);
    EXPECT_NEAR(joints[0].turn, turn, 1e-14);
    EXPECT_NEAR(joints[0].s, 10.0, 1e-14);
  }
  const auto back = findJoints(contourOf({Line{{0, 0}, {5, 0}}, Line{{5, 0}, {0, 0}}}));
  ASSERT_EQ(back.size(), 2u);
  for (const Joint& joint : back) EXPECT_NEAR(std::abs(joint.turn), pi, 1e-15);
  // Below the tolerance: smooth.
  const auto smooth = findJoints(contourOf({Line{{-10, 0}, {0, 0}}, Line{{0, 0}, {10, 5e-4}}}, false));
  EXPECT_EQ(smooth[0].kind, JointKind::smooth);
  // An S of two arcs: the curvature changes its sign.
  const auto step =
      findJoints(contourOf({Arc{{0, 0}, 10, -pi, pi / 2}, Arc{{0, -30}, 20, pi / 2, -pi / 4}}, false));
  EXPECT_EQ(step[0].kind, JointKind::curvatureStep);
  EXPECT_NEAR(step[0].curvatureChange, -0.15, 1e-14);
}

TEST(FindJoints, LooksPastDoubledPolesAndCusps) {
  const Curve slow = testing::bezier({{0, 0}, {10, 0}, {20, 0}, {20, 0}});
  const auto joints = findJoints(contourOf({slow, Line{{20, 0}, {20, 10}}}, false));
  ASSERT_EQ(joints.size(), 1u);
  EXPECT_NEAR(joints[0].turn, pi / 2, 1e-6);
  // Quarters of an astroid meet in cusps: the tangent turns back.
  for (const Joint& joint : findJoints(trigContour(testing::astroid(8), 4))) {
    EXPECT_EQ(joint.kind, JointKind::tangentBreak);
    EXPECT_NEAR(std::abs(joint.turn), pi, 1e-5);
  }
}

TEST(SplitAtKnots, CutsWhereCurvatureMayJumpAndKeepsTheShape) {
  std::mt19937_64 random(11);
  for (int i = 0; i < 200; ++i) {
    SCOPED_TRACE("seed 11, spline " + std::to_string(i));
    const Contour c = contourOf({Curve(testing::randomSpline(random))}, false);
    const Contour split = splitAtKnots(c);
    EXPECT_NEAR(length(split), length(c), 1e-11 * length(c));
    for (const Segment& segment : split.segments) {
      const curve::Nurbs& n = *segment.curve.asNurbs();
      for (double u : segment.curve.breaks())
        EXPECT_LT(std::count(n.knots.begin(), n.knots.end(), u), n.degree - 1);
      EXPECT_EQ(segment.source, "curve");
    }
    for (const Joint& joint : findJoints(split)) EXPECT_NEAR(joint.gap, 0.0, 1e-10);
    EXPECT_EQ(splitAtKnots(split).segments.size(), split.segments.size());
  }
}

TEST(Reversed, KeepsLengthAndMirrorsJoints) {
  const Contour c = reuleaux(50);
  const Contour back = reversed(c);
  EXPECT_NEAR(length(back), length(c), 1e-12);
  for (const Joint& joint : findJoints(back)) {
    EXPECT_NEAR(joint.turn, -pi / 3, 1e-14);
    EXPECT_NEAR(joint.gap, 0.0, 1e-13);
  }
}

TEST(Bounds, JoinTheSegments) {
  const curve::Box box = bounds(stadium(100, 20));
  EXPECT_NEAR(box.low.x, -70, 1e-13);
  EXPECT_NEAR(box.high.x, 70, 1e-13);
  EXPECT_NEAR(box.low.y, -20, 1e-13);
  EXPECT_NEAR(box.high.y, 20, 1e-13);
}

}  // namespace
}  // namespace kf::contour
