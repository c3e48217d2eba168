// Our splines against OpenCASCADE's: points, derivatives to the third, cuts and lengths.
// Lengths in mm. An independent implementation of the same definitions; linked by this test only.
#include <gtest/gtest.h>

#include <GCPnts_AbscissaPoint.hxx>
#include <Geom2dAdaptor_Curve.hxx>
#include <Geom2d_BSplineCurve.hxx>
#include <TColStd_Array1OfInteger.hxx>
#include <TColStd_Array1OfReal.hxx>
#include <TColgp_Array1OfPnt2d.hxx>
#include <gp_Pnt2d.hxx>
#include <gp_Vec2d.hxx>

#include "core/curve/arc_length.h"
#include "tests/support/random_spline.h"

namespace kf::curve {
namespace {

constexpr std::uint64_t kSeed = 42;

opencascade::handle<Geom2d_BSplineCurve> theirs(const Nurbs& n) {
  const auto poleCount = static_cast<int>(n.poles.size());
  TColgp_Array1OfPnt2d poles(1, poleCount);
  TColStd_Array1OfReal weights(1, poleCount);
  for (int i = 1; i <= poleCount; ++i) {
    const auto at = static_cast<std::size_t>(i - 1);
    poles(i) = gp_Pnt2d(n.poles[at].x, n.poles[at].y);
    weights(i) = n.weights.empty() ? 1.0 : n.weights[at];
  }
  std::vector<double> distinct;
  std::vector<int> repeats;
  for (double knot : n.knots) {
    if (distinct.empty() || knot > distinct.back()) {
      distinct.push_back(knot);
      repeats.push_back(0);
    }
    ++repeats.back();
  }
  TColStd_Array1OfReal knots(1, static_cast<int>(distinct.size()));
  TColStd_Array1OfInteger multiplicities(1, static_cast<int>(distinct.size()));
  for (std::size_t i = 0; i < distinct.size(); ++i) {
    knots(static_cast<int>(i) + 1) = distinct[i];
    multiplicities(static_cast<int>(i) + 1) = repeats[i];
  }
  return new Geom2d_BSplineCurve(poles, weights, knots, multiplicities, n.degree);
}

double between(const Curve& c, double part) {
  return c.first() + part * (c.last() - c.first());
}

TEST(AgainstOpenCascade, PointsAndDerivativesAgree) {
  std::mt19937_64 random(kSeed);
  for (int i = 0; i < 2000; ++i) {
    SCOPED_TRACE("seed " + std::to_string(kSeed) + ", spline " + std::to_string(i));
    const Nurbs n = testing::randomSpline(random, {1, 9, 20.0, false, false});
    const Curve c(n);
    const auto other = theirs(n);
    EXPECT_NEAR(other->FirstParameter(), c.first(), 1e-14);
    EXPECT_NEAR(other->LastParameter(), c.last(), 1e-14);
    for (int j = 0; j < 5; ++j) {
      const double u = between(c, testing::uniform(random, 0.001, 0.999));
      gp_Pnt2d p;
      gp_Vec2d d1, d2, d3;
      other->D3(u, p, d1, d2, d3);
      const Jet mine = c.jet(u);
      EXPECT_NEAR(distance(mine.p, {p.X(), p.Y()}), 0.0, 1e-10);
      EXPECT_NEAR(norm(mine.d1 - Vec2{d1.X(), d1.Y()}), 0.0, 1e-11 * (norm(mine.d1) + 100));
      EXPECT_NEAR(norm(mine.d2 - Vec2{d2.X(), d2.Y()}), 0.0, 1e-10 * (norm(mine.d2) + norm(mine.d1) + 100));
      EXPECT_NEAR(norm(mine.d3 - Vec2{d3.X(), d3.Y()}), 0.0,
                  1e-9 * (norm(mine.d3) + norm(mine.d2) + norm(mine.d1) + 100));
    }
  }
}

TEST(AgainstOpenCascade, CutsAgree) {
  std::mt19937_64 random(kSeed + 1);
  for (int i = 0; i < 1000; ++i) {
    SCOPED_TRACE("seed " + std::to_string(kSeed + 1) + ", spline " + std::to_string(i));
    const Nurbs n = testing::randomSpline(random, {1, 7, 10.0, false, false});
    const Curve c(n);
    const double a = between(c, testing::uniform(random, 0.0, 0.45)),
                 b = between(c, testing::uniform(random, 0.55, 1.0));
    const auto other = theirs(n);
    other->Segment(a, b);
    const Curve part = c.trimmed(a, b);
    for (double share : {0.0, 0.2, 0.5, 0.77, 1.0}) {
      const gp_Pnt2d p =
          other->Value(other->FirstParameter() + share * (other->LastParameter() - other->FirstParameter()));
      EXPECT_NEAR(distance(part.point(between(part, share)), {p.X(), p.Y()}), 0.0, 1e-8);
    }
  }
}

// Its lengths are asked for in parts of a span, so that its rule resolves them.
TEST(AgainstOpenCascade, LengthsAgree) {
  std::mt19937_64 random(kSeed + 2);
  for (int i = 0; i < 1000; ++i) {
    SCOPED_TRACE("seed " + std::to_string(kSeed + 2) + ", spline " + std::to_string(i));
    const Nurbs n = testing::randomSpline(random, {1, 6, 4.0, false, false});
    const Curve c(n);
    Geom2dAdaptor_Curve adaptor(theirs(n));
    double length = 0.0, from = c.first();
    std::vector<double> ends = c.breaks();
    ends.push_back(c.last());
    for (double to : ends) {
      constexpr int kParts = 8;
      for (int part = 0; part < kParts; ++part) {
        length += GCPnts_AbscissaPoint::Length(adaptor, from + (to - from) * part / kParts,
                                               from + (to - from) * (part + 1) / kParts, 1e-12);
      }
      from = to;
    }
    EXPECT_NEAR(totalLength(c), length, 1e-8 * length);
  }
}

}  // namespace
}  // namespace kf::curve
