// Laws every curve obeys: additive length, rigid motion, scaling, reversal, trimming, one-sided derivatives.
// Lengths in mm, angles in rad. Random splines are seeded; the seed is in the failure's trace.
#include <gtest/gtest.h>

#include <cmath>
#include <functional>
#include <numbers>
#include <random>

#include "core/curve/arc_length.h"
#include "tests/support/random_spline.h"
#include "tests/support/trig_curve.h"

namespace kf::curve {
namespace {

using std::numbers::pi;
using testing::randomSpline;
using testing::uniform;

constexpr std::uint64_t kSeed = 20240611;

// Every kind of curve, many of each.
void eachCurve(int count, const std::function<void(const Curve&, std::mt19937_64&)>& visit,
               const testing::SplineShape& shape = {}) {
  std::mt19937_64 random(kSeed);
  for (int i = 0; i < count; ++i) {
    SCOPED_TRACE("seed " + std::to_string(kSeed) + ", curve " + std::to_string(i));
    const double sweep = uniform(random, 0.01, 2 * pi) * (random() % 2 == 0 ? 1.0 : -1.0);
    const Vec2 c{uniform(random, -100, 100), uniform(random, -100, 100)};
    switch (i % 5) {
      case 0:
        visit(Line{c, {uniform(random, -100, 100), uniform(random, -100, 100)}}, random);
        break;
      case 1:
        visit(Arc{c, uniform(random, 0.01, 100), uniform(random, -7, 7), sweep}, random);
        break;
      case 2:
        visit(EllipticArc{c,
                          {uniform(random, 5, 80), uniform(random, -20, 20)},
                          {uniform(random, -4, 4), uniform(random, 1, 30)},
                          uniform(random, -7, 7),
                          sweep},
              random);
        break;
      default:
        visit(randomSpline(random, shape), random);
    }
  }
}

double between(const Curve& c, double part) {
  return c.first() + part * (c.last() - c.first());
}

TEST(Length, IsAdditive) {
  eachCurve(500, [](const Curve& c, std::mt19937_64& random) {
    const double m = between(c, uniform(random, 0.0, 1.0));
    const double left = arcLength(c, c.first(), m)->length, right = arcLength(c, m, c.last())->length;
    const double whole = totalLength(c);
    EXPECT_NEAR(left + right, whole, 1e-11 * whole);
  });
}

TEST(Length, IsKeptByMotionAndScaledBySimilarity) {
  eachCurve(500, [](const Curve& c, std::mt19937_64& random) {
    const double factor = std::exp(uniform(random, -3, 3));
    const Affine2 mirror =
        random() % 2 == 0 ? Affine2::scaling(factor, -factor) : Affine2::scaling(factor, factor);
    const Affine2 map = Affine2::translation({uniform(random, -50, 50), uniform(random, -50, 50)}) *
                        Affine2::rotation(uniform(random, -4, 4)) * mirror;
    const Curve moved = c.transformed(map);
    const double whole = totalLength(c);
    EXPECT_NEAR(totalLength(moved), factor * whole, 1e-11 * factor * whole);
    const double u = between(c, uniform(random, 0.0, 1.0));
    EXPECT_NEAR(distance(moved.point(u), map.point(c.point(u))), 0.0, 1e-11 * factor * 200);
    // Curvature scales with 1/factor and turns its sign in a mirror; its slope with 1/factor^2.
    const Bend a = bend(c.jet(u)), b = bend(moved.jet(u));
    const double sign = map.determinant() < 0.0 ? -1.0 : 1.0;
    if (a.regular) {
      EXPECT_NEAR(b.k * factor, sign * a.k, 1e-8 * (std::abs(a.k) + 1e-3));
      EXPECT_NEAR(b.dkds * factor * factor, sign * a.dkds, 1e-7 * (std::abs(a.dkds) + a.k * a.k + 1e-4));
    }
  });
}

TEST(AffineImage, IsExact) {
  eachCurve(500, [](const Curve& c, std::mt19937_64& random) {
    const Affine2 map{uniform(random, 0.5, 2), uniform(random, -1, 0.2), uniform(random, 0, 1),
                      uniform(random, 0.5, 2), uniform(random, -9, 9),   uniform(random, -9, 9)};
    const Curve image = c.transformed(map);
    const double u = between(c, uniform(random, 0.0, 1.0));
    const Jet a = c.jet(u), b = image.jet(u);
    EXPECT_NEAR(distance(b.p, map.point(a.p)), 0.0, 1e-11 * (norm(a.p) + 100));
    EXPECT_NEAR(norm(b.d1 - map.vector(a.d1)), 0.0, 1e-10 * (norm(a.d1) + 1));
    EXPECT_NEAR(norm(b.d3 - map.vector(a.d3)), 0.0, 1e-8 * (norm(a.d3) + norm(a.d2) + norm(a.d1) + 1));
  });
}

TEST(Reversal, MirrorsTheParameterAndTurnsCurvature) {
  eachCurve(500, [](const Curve& c, std::mt19937_64& random) {
    const Curve back = c.reversed();
    EXPECT_NEAR(distance(back.startPoint(), c.endPoint()), 0.0, 1e-11 * (norm(c.endPoint()) + 1));
    EXPECT_NEAR(distance(back.endPoint(), c.startPoint()), 0.0, 1e-11 * (norm(c.startPoint()) + 1));
    EXPECT_NEAR(totalLength(back), totalLength(c), 1e-11 * totalLength(c));
    const double part = uniform(random, 0.0, 1.0), u = between(c, part);
    const Jet a = c.jet(u), b = back.jet(between(back, 1.0 - part));
    EXPECT_NEAR(distance(a.p, b.p), 0.0, 1e-10 * (norm(a.p) + 100));
    EXPECT_NEAR(norm(a.d1 + b.d1), 0.0, 1e-9 * (norm(a.d1) + norm(a.d2) + 1));
    const Bend p = bend(a), q = bend(b);
    EXPECT_NEAR(p.k, -q.k, 1e-7 * (std::abs(p.k) + 1e-3));
    EXPECT_NEAR(p.dkds, q.dkds, 1e-6 * (std::abs(p.dkds) + p.k * p.k + 1e-3));
  });
}

TEST(Trimming, KeepsPointsAndDerivatives) {
  eachCurve(1000, [](const Curve& c, std::mt19937_64& random) {
    double a = uniform(random, 0.0, 1.0), b = uniform(random, 0.0, 1.0);
    if (std::abs(a - b) < 1e-3) return;
    if (a > b) std::swap(a, b);
    const double from = between(c, a), to = between(c, b);
    const Curve part = c.trimmed(from, to);
    const double share = uniform(random, 0.0, 1.0);
    const Jet whole = c.jet(from + share * (to - from)), cut = part.jet(between(part, share));
    const double rate = (to - from) / (part.last() - part.first());
    EXPECT_NEAR(distance(whole.p, cut.p), 0.0, 1e-10 * (norm(whole.p) + 100));
    EXPECT_NEAR(norm(rate * whole.d1 - cut.d1), 0.0, 1e-8 * (rate * norm(whole.d1) + 1));
    EXPECT_NEAR(distance(part.startPoint(), c.point(from)), 0.0, 1e-10 * (norm(whole.p) + 100));
    EXPECT_NEAR(distance(part.endPoint(), c.point(to)), 0.0, 1e-10 * (norm(whole.p) + 100));
    EXPECT_NEAR(totalLength(part), arcLength(c, from, to)->length, 1e-10 * totalLength(c));
  });
}

TEST(ParameterAtLength, InvertsArcLength) {
  eachCurve(500, [](const Curve& c, std::mt19937_64& random) {
    const double whole = totalLength(c);
    const double a = between(c, uniform(random, 0.0, 0.5)), rest = arcLength(c, a, c.last())->length;
    for (double part : {1e-6, 0.1, 0.5, 0.999999, 1.0}) {
      const auto u = parameterAtLength(c, a, part * rest);
      ASSERT_TRUE(u) << u.error().message;
      EXPECT_NEAR(arcLength(c, a, *u)->length, part * rest, 1e-10 * std::max(part * rest, whole * 1e-2));
    }
    EXPECT_EQ(*parameterAtLength(c, a, 0.0), a);
    EXPECT_LE(*parameterAtLength(c, a, rest * 1.01), c.last());
  });
}

TEST(Derivatives, AreTheLimitsOfDifferences) {
  eachCurve(500,
            [](const Curve& c, std::mt19937_64& random) {
              const double u = between(c, uniform(random, 0.05, 0.95));
              for (double knot : c.breaks())
                if (std::abs(knot - u) < 2e-3) return;
              const double h = 1e-3 * std::min(1.0, c.last() - c.first());
              const Jet m = c.jet(u - h), p = c.jet(u + h), j = c.jet(u);
              const double size = norm(j.d1) + norm(j.d2) + norm(j.d3) + 1;
              EXPECT_NEAR(norm((p.p - m.p) / (2 * h) - j.d1), 0.0, 1e-3 * size);
              EXPECT_NEAR(norm((p.d1 - m.d1) / (2 * h) - j.d2), 0.0, 1e-3 * size);
              EXPECT_NEAR(norm((p.d2 - m.d2) / (2 * h) - j.d3), 0.0, 1e-2 * size);
            },
            {1, 4, 3.0, false, false});
}

// A spline of degree p is p - m times continuous at a knot of multiplicity m; the two sides of a jump are the
// limits from either side.
TEST(OneSidedDerivatives, AreTheLimitsFromTheirSide) {
  std::mt19937_64 random(kSeed);
  for (int i = 0; i < 500; ++i) {
    SCOPED_TRACE("seed " + std::to_string(kSeed) + ", spline " + std::to_string(i));
    const Nurbs n = randomSpline(random);
    const Curve c(n);
    for (double knot : c.breaks()) {
      const auto repeats = std::count(n.knots.begin(), n.knots.end(), knot);
      const Jet left = c.jet(knot, Side::left), right = c.jet(knot, Side::right);
      const double h = 1e-9;
      const Jet before = c.jet(knot - h), after = c.jet(knot + h);
      const auto near = [h](Vec2 a, Vec2 b, Vec2 slope) {
        EXPECT_NEAR(norm(a - b), 0.0, 10 * h * norm(slope) + 1e-6 * (norm(a) + 1));
      };
      near(left.p, before.p, left.d1);
      near(right.p, after.p, right.d1);
      near(left.d1, before.d1, left.d2);
      near(right.d1, after.d1, right.d2);
      near(left.d2, before.d2, left.d3);
      near(right.d2, after.d2, right.d3);
      EXPECT_NEAR(distance(left.p, right.p), 0.0, 1e-10 * (norm(left.p) + 100));
      if (repeats <= n.degree - 1) {
        EXPECT_NEAR(norm(left.d1 - right.d1), 0.0, 1e-9 * (norm(left.d1) + norm(left.d2) + 1));
      }
      if (repeats <= n.degree - 2) {
        EXPECT_NEAR(norm(left.d2 - right.d2), 0.0, 1e-8 * (norm(left.d2) + norm(left.d3) + 1));
      }
    }
  }
}

// Degree elevation by hand: a straight line with equally spaced poles is the identity map at any degree.
TEST(EveryDegree, DrawsALineEvenly) {
  for (int degree = 1; degree <= kMaxDegree; ++degree) {
    std::vector<Vec2> poles;
    for (int i = 0; i <= degree; ++i) poles.push_back({100.0 * i / degree, -40.0 * i / degree});
    const Curve c = testing::bezier(poles);
    for (double u : {0.0, 0.123, 0.5, 0.9, 1.0}) {
      const Jet j = c.jet(u);
      EXPECT_NEAR(distance(j.p, {100 * u, -40 * u}), 0.0, 1e-11) << "degree " << degree;
      EXPECT_NEAR(norm(j.d1 - Vec2{100, -40}), 0.0, 1e-9);
      EXPECT_NEAR(norm(j.d2), 0.0, 1e-7);
    }
    EXPECT_NEAR(totalLength(c), std::hypot(100, 40), 1e-10);
    const Curve part = c.trimmed(0.2, 0.7);
    EXPECT_NEAR(distance(part.startPoint(), {20, -8}), 0.0, 1e-11);
    EXPECT_NEAR(distance(part.endPoint(), {70, -28}), 0.0, 1e-11);
  }
}

// A circle of one period, by its polygon: the periodic cubic through a regular polygon's poles is itself
// symmetric.
TEST(PeriodicSpline, ClosesWithAllItsDerivatives) {
  std::mt19937_64 random(kSeed);
  for (int degree = 1; degree <= 7; ++degree) {
    for (std::size_t count : {2u, 3u, 5u, 12u}) {
      std::vector<double> knots{0.0};
      std::vector<Vec2> poles;
      std::vector<double> weights;
      for (std::size_t i = 0; i < count; ++i) {
        knots.push_back(knots.back() + uniform(random, 0.2, 1.0));
        poles.push_back({uniform(random, -9, 9), uniform(random, -9, 9)});
        weights.push_back(uniform(random, 0.5, 2.0));
      }
      const auto n = makePeriodicNurbs(degree, knots, poles, weights);
      ASSERT_TRUE(n) << n.error().message;
      const Curve c(*n);
      EXPECT_EQ(c.first(), knots.front());
      EXPECT_EQ(c.last(), knots.back());
      const Jet start = c.jet(c.first()), end = c.jet(c.last(), Side::left);
      EXPECT_NEAR(distance(start.p, end.p), 0.0, 1e-12);
      if (degree >= 2) {
        EXPECT_NEAR(norm(start.d1 - end.d1), 0.0, 1e-9 * (1 + norm(start.d1)));
      }
      if (degree >= 3) {
        EXPECT_NEAR(norm(start.d2 - end.d2), 0.0, 1e-8 * (1 + norm(start.d2)));
      }
      if (degree >= 4) {
        EXPECT_NEAR(norm(start.d3 - end.d3), 0.0, 1e-7 * (1 + norm(start.d3)));
      }
    }
  }
}

TEST(Bounds, HoldEveryPointAndAreTouched) {
  eachCurve(300, [](const Curve& c, std::mt19937_64&) {
    const Box box = c.bounds();
    Box sampled;
    constexpr int kSamples = 4000;
    for (int i = 0; i <= kSamples; ++i) sampled.include(c.point(between(c, double(i) / kSamples)));
    for (double knot : c.breaks()) sampled.include(c.point(knot));  // corners
    const double size = box.width() + box.height();
    EXPECT_LE(box.low.x, sampled.low.x + 1e-11 * size);
    EXPECT_LE(box.low.y, sampled.low.y + 1e-11 * size);
    EXPECT_GE(box.high.x, sampled.high.x - 1e-11 * size);
    EXPECT_GE(box.high.y, sampled.high.y - 1e-11 * size);
    EXPECT_NEAR(box.low.x, sampled.low.x, 1e-4 * size);
    EXPECT_NEAR(box.low.y, sampled.low.y, 1e-4 * size);
    EXPECT_NEAR(box.high.x, sampled.high.x, 1e-4 * size);
    EXPECT_NEAR(box.high.y, sampled.high.y, 1e-4 * size);
  });
}

// A million mm from the origin only the last digits of the coordinates are lost.
TEST(HugeCoordinates, KeepLengthAndCurvature) {
  eachCurve(300,
            [](const Curve& c, std::mt19937_64& random) {
              const Curve far = c.transformed(Affine2::translation({1e6, -1e6}));
              const double whole = totalLength(c);
              EXPECT_NEAR(totalLength(far), whole, 1e-7);
              const double u = between(c, uniform(random, 0.0, 1.0));
              EXPECT_NEAR(distance(far.point(u), c.point(u) + Vec2{1e6, -1e6}), 0.0, 1e-7);
              const Box near = c.bounds(), moved = far.bounds();
              EXPECT_NEAR(moved.low.x - 1e6, near.low.x, 1e-7);
              EXPECT_NEAR(moved.high.y + 1e6, near.high.y, 1e-7);
            },
            {1, 5, 10.0, false, false});
}

TEST(TinyCurves, ScaleLikeAnyOther) {
  eachCurve(200, [](const Curve& c, std::mt19937_64&) {
    const Curve tiny = c.transformed(Affine2::scaling(1e-9, 1e-9));
    const double whole = totalLength(c);
    EXPECT_NEAR(totalLength(tiny), 1e-9 * whole, 1e-20 * whole);
  });
}

// With w = (1, r, 1) a quadratic is a conic through the same ends; its shoulder point is (P0 + 2 r P1 + P2) /
// (2 + 2 r), and length, trimming and the inverse hold for weights a million apart.
TEST(FarApartWeights, StayAccurate) {
  for (double r : {1e-6, 1e-3, 1e3, 1e6}) {
    const Curve c = testing::bezier({{0, 0}, {50, 80}, {100, 0}}, {1, r, 1});
    EXPECT_NEAR(c.point(0.5).y, 160 * r / (2 + 2 * r), 1e-12 * 80);
    const double whole = totalLength(c);
    // Between the chord and the control polygon.
    EXPECT_GT(whole, 100.0);
    EXPECT_LT(whole, 2 * std::hypot(50, 80));
    const double half = arcLength(c, 0.0, 0.5)->length;
    EXPECT_NEAR(half, whole / 2, 1e-10 * whole);
    const auto u = parameterAtLength(c, 0.0, 0.3 * whole);
    ASSERT_TRUE(u);
    EXPECT_NEAR(arcLength(c, 0.0, *u)->length, 0.3 * whole, 1e-10 * whole);
    const Curve part = c.trimmed(0.1, 0.6);
    EXPECT_NEAR(distance(part.point(0.35), c.point(0.35)), 0.0, 1e-10);
  }
}

TEST(StatedBound, HoldsForTheLength) {
  eachCurve(500, [](const Curve& c, std::mt19937_64&) {
    const auto fine = arcLength(c, c.first(), c.last(), 1e-13);
    ASSERT_TRUE(fine);
    for (double tolerance : {1e-3, 1e-6, 1e-9}) {
      const auto coarse = arcLength(c, c.first(), c.last(), tolerance);
      ASSERT_TRUE(coarse);
      EXPECT_LE(coarse->bound, tolerance * coarse->length * (1 + 1e-9));
      EXPECT_LE(std::abs(coarse->length - fine->length), coarse->bound + 1e-12 * fine->length);
    }
  });
}

TEST(ClosestPoint, AgreesWithBruteForce) {
  eachCurve(400, [](const Curve& c, std::mt19937_64& random) {
    const Box box = c.bounds();
    const Vec2 p{uniform(random, box.low.x - 20, box.high.x + 20),
                 uniform(random, box.low.y - 20, box.high.y + 20)};
    double brute = HUGE_VAL;
    constexpr int kSamples = 20000;
    for (int i = 0; i <= kSamples; ++i)
      brute = std::min(brute, distance(c.point(between(c, double(i) / kSamples)), p));
    const ClosestPoint found = closestPoint(c, p);
    EXPECT_LE(found.distance, brute * (1 + 1e-9) + 1e-9);
    EXPECT_NEAR(found.distance, distance(c.point(found.u), p), 1e-12 * (1 + found.distance));
    EXPECT_GE(found.u, c.first());
    EXPECT_LE(found.u, c.last());
  });
}

}  // namespace
}  // namespace kf::curve
