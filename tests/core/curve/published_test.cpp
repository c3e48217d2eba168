// Arc length and curvature against published and independently computed values.
// Lengths in mm unless said. Each check names its source; "computed" means mpmath 1.2.1 at 20-30 digits.
#include <gtest/gtest.h>

#include <cmath>
#include <numbers>
#include <vector>

#include "core/curve/arc_length.h"
#include "core/numeric/gauss_legendre.h"
#include "tests/support/taylor.h"
#include "tests/support/trig_curve.h"

namespace kf::curve {
namespace {

using std::numbers::pi;
using testing::Taylor;

constexpr double kRelative = 1e-12;

Curve ellipse(double a, double b) {
  return EllipticArc{{0, 0}, {a, 0}, {0, b}, 0.0, 2 * pi};
}

double lengthOf(const Curve& c) {
  return totalLength(c);
}

// Arc length of a formula by ten-point Gauss on 64 parts, with derivatives from Taylor arithmetic.
template <class Formula>
double formulaLength(const Formula& formula, double a, double b) {
  double sum = 0.0;
  constexpr int kParts = 64;
  for (int i = 0; i < kParts; ++i) {
    sum += numeric::gauss10([&](double t) { return norm(testing::jetOf(formula, t).d1); },
                            a + (b - a) * i / kParts, a + (b - a) * (i + 1) / kParts);
  }
  return sum;
}

template <class Formula>
double formulaCurvature(const Formula& formula, double t) {
  return bend(testing::jetOf(formula, t)).k;
}

// A formula drawn as a C2 cubic through its own points, its end tangents given.
template <class Formula>
Curve throughPoints(const Formula& formula, double a, double b, int parts) {
  std::vector<Vec2> points;
  for (int i = 0; i <= parts; ++i) points.push_back(testing::jetOf(formula, a + (b - a) * i / parts).p);
  const Vec2 start = testing::jetOf(formula, a).d1, end = testing::jetOf(formula, b).d1;
  return *interpolateCubic(points, &start, &end);
}

// OEIS A334849 (ellipse 3 by 2); DLMF 19.30(i) (50 by 30); computed (2 by 1, 100 by 1).
TEST(PublishedEllipse, HasThePerimeterOfTheEllipticIntegral) {
  EXPECT_NEAR(lengthOf(ellipse(3, 2)), 15.865439589290589791, 15.9 * kRelative);
  EXPECT_NEAR(lengthOf(ellipse(50, 30)), 255.26998863398128, 255.3 * kRelative);
  EXPECT_NEAR(lengthOf(ellipse(2, 1)), 9.6884482205476762, 9.7 * kRelative);
  EXPECT_NEAR(lengthOf(ellipse(100, 1)), 400.10983297226519, 400.1 * kRelative);
}

// Computed: incomplete elliptic integrals.
TEST(PublishedEllipse, HasTheLengthOfItsParts) {
  const Curve e = ellipse(50, 30);
  for (const auto& [degrees, length] :
       {std::pair{30.0, 16.844756972247781}, std::pair{45.0, 26.960682803978901},
        std::pair{90.0, 63.817497158495321}}) {
    const auto part = arcLength(e, 0.0, degrees / 360.0);
    ASSERT_TRUE(part);
    EXPECT_NEAR(part->length, length, length * kRelative);
    const auto back = parameterAtLength(e, 0.0, length);
    ASSERT_TRUE(back);
    EXPECT_NEAR(*back * 360.0, degrees, 1e-10 * degrees);
  }
}

// k = a b / (a^2 sin^2 t + b^2 cos^2 t)^(3/2); the values computed.
TEST(PublishedEllipse, HasTheCurvatureOfTheFormula) {
  const Curve e = ellipse(50, 30);
  const auto k = [&e](double degrees) { return bend(e.jet(degrees / 360.0)).k; };
  EXPECT_NEAR(k(0), 1.0 / 18.0, kRelative);
  EXPECT_NEAR(k(90), 0.012, kRelative);
  EXPECT_NEAR(k(45), 0.0214002022090882, 1e-14);
  EXPECT_NEAR(k(30), 0.0320019343976094, 1e-14);
  const Curve rational = testing::rationalStretch(testing::ellipse(50, 30), 0.0, pi / 2);
  EXPECT_NEAR(bend(rational.jet(0.0)).k, 1.0 / 18.0, kRelative);
  EXPECT_NEAR(bend(rational.jet(0.5)).k, 0.0214002022090882, 1e-13);
  EXPECT_NEAR(bend(rational.jet(1.0)).k, 0.012, kRelative);
}

// Abramowitz & Stegun, table 17.1 (table not read; computed).
TEST(GaussLegendre, GivesCompleteEllipticIntegrals) {
  const auto integral = [](auto f) {
    double sum = 0.0;
    for (int i = 0; i < 8; ++i) sum += numeric::gauss10(f, pi / 16 * i, pi / 16 * (i + 1));
    return sum;
  };
  const auto second = [&](double m) {
    return integral([m](double t) { return std::sqrt(1 - m * std::sin(t) * std::sin(t)); });
  };
  EXPECT_NEAR(second(0.5), 1.35064388104767550, 1e-14);
  EXPECT_NEAR(second(0.25), 1.46746220933942716, 1e-14);
  EXPECT_NEAR(second(0.64), 1.27634994316990642, 1e-14);
  EXPECT_NEAR(integral([](double t) { return 1 / std::sqrt(1 - 0.5 * std::sin(t) * std::sin(t)); }),
              1.85407467730137192, 1e-14);
}

// DLMF 19.30.13: r^2 = a^2 cos 2t has length 5.2441151085842396 a, and k = 3 r / a^2. The quarter is the
// rational curve a (z + z^3, z - z^3) / (1 + z^4), z from 0 to 1.
TEST(PublishedLemniscate, HasItsLengthAndCurvature) {
  const double a = 10.0;
  const auto bx = testing::bernstein({0, a, 0, a, 0}), by = testing::bernstein({0, a, 0, -a, 0}),
             bw = testing::bernstein({1, 0, 0, 0, 1});
  std::vector<Vec2> poles;
  for (std::size_t i = 0; i < 5; ++i) poles.push_back({bx[i] / bw[i], by[i] / bw[i]});
  const Curve quarter = testing::bezier(poles, bw);
  EXPECT_NEAR(4 * lengthOf(quarter), 5.2441151085842396 * a, 52.4 * kRelative);
  for (double u : {0.01, 0.2, 0.5, 0.77, 1.0}) {
    const Jet j = quarter.jet(u);
    EXPECT_NEAR(std::abs(bend(j).k), 3 * norm(j.p) / (a * a), 1e-12);
  }
}

// OEIS A103710: sqrt 2 + ln(1 + sqrt 2), the arc over the latus rectum in semi-latus recta.
TEST(PublishedParabola, HasTheUniversalConstant) {
  // y = x^2 / 2 has semi-latus rectum 1; the latus rectum ends at x = +-1.
  const Curve p = testing::bezierFromPowers({-1, 2, 0}, {0.5, -2, 2});
  EXPECT_NEAR(lengthOf(p), 2.2955871493926380740, 2.3 * kRelative);
}

// Computed: y = x^2 / 100 on [-50, 50].
TEST(PublishedParabola, HasItsLengthAndCurvature) {
  const Curve p = testing::bezierFromPowers({-50, 100, 0}, {25, -100, 100});
  EXPECT_NEAR(lengthOf(p), 114.77935746963190, 115 * kRelative);
  EXPECT_NEAR(bend(p.jet(0.5)).k, 0.02, 1e-15);
  EXPECT_NEAR(bend(p.jet(1.0)).k, 0.0070710678118654752, 1e-15);
  EXPECT_NEAR(bend(p.jet(0.5)).dkds, 0.0, 1e-15);
}

// Textbook closed forms, recomputed: an arch of 8 r, s = 4 r (1 - cos t/2), k = 1/(4 r) at the top.
TEST(PublishedCycloid, HasItsLengthAndCurvature) {
  const double r = 3.0;
  const auto cycloid = [r](const Taylor& t) {
    return std::pair{Taylor(r) * (t - sin(t)), Taylor(r) * (Taylor(1) - cos(t))};
  };
  EXPECT_NEAR(formulaLength(cycloid, 0, 2 * pi), 8 * r, 24 * kRelative);
  EXPECT_NEAR(formulaLength(cycloid, 0, 2.0), 4 * r * (1 - std::cos(1.0)), kRelative);
  EXPECT_NEAR(formulaCurvature(cycloid, pi), -1 / (4 * r), 1e-15);
}

// Computed: cardioid r = a (1 + cos t): length 8 a; k(0) = 3 / (4 a). The cusp lies at t = pi.
TEST(PublishedCardioid, HasItsLengthUpToTheCusp) {
  const double a = 5.0;
  double length = 0.0;
  for (double t : {-1.0, -0.5, 0.0, 0.5}) {
    length += lengthOf(testing::rationalStretch(testing::cardioid(a), t * pi, (t + 0.5) * pi));
  }
  EXPECT_NEAR(length, 8 * a, 40 * kRelative);
  const Curve start = testing::rationalStretch(testing::cardioid(a), 0.0, 1.0);
  EXPECT_NEAR(bend(start.jet(0.0)).k, 3 / (4 * a), 1e-14);
}

// Computed: 6 a; radius 1.5 a at 45 degrees. Both ends of each quarter are cusps.
TEST(PublishedAstroid, HasItsLengthBetweenCusps) {
  const double a = 8.0;
  double length = 0.0;
  for (int i = 0; i < 4; ++i)
    length += lengthOf(testing::rationalStretch(testing::astroid(a), i * pi / 2, (i + 1) * pi / 2));
  EXPECT_NEAR(length, 6 * a, 48 * kRelative);
  const Curve quarter = testing::rationalStretch(testing::astroid(a), 0.0, pi / 2);
  EXPECT_NEAR(std::abs(bend(quarter.jet(0.5)).k), 1 / (1.5 * a), 1e-13);
}

// Computed: 16 and 24.
TEST(PublishedDeltoidAndNephroid, HaveTheirLengths) {
  double deltoid = 0.0, nephroid = 0.0;
  for (int i = 0; i < 3; ++i)
    deltoid += lengthOf(testing::rationalStretch(testing::deltoid(), i * pi / 1.5, (i + 1) * pi / 1.5));
  for (int i = 0; i < 4; ++i)
    nephroid += lengthOf(testing::rationalStretch(testing::nephroid(), i * pi / 2, (i + 1) * pi / 2));
  EXPECT_NEAR(deltoid, 16, 16 * kRelative);
  EXPECT_NEAR(nephroid, 24, 24 * kRelative);
}

// Computed: Archimedean r = t and logarithmic r = e^(0.2 t), one turn from 0.
TEST(PublishedSpirals, HaveTheirLengthAndCurvature) {
  const auto archimedean = [](const Taylor& t) { return std::pair{t * cos(t), t * sin(t)}; };
  EXPECT_NEAR(formulaLength(archimedean, 0, 2 * pi), 21.256294148209099, 21.3 * kRelative);
  EXPECT_NEAR(formulaCurvature(archimedean, 2 * pi), 0.16105970151222293, 1e-15);
  const auto logarithmic = [](const Taylor& t) {
    const Taylor r = exp(Taylor(0.2) * t);
    return std::pair{r * cos(t), r * sin(t)};
  };
  EXPECT_NEAR(formulaLength(logarithmic, 0, 2 * pi), 12.816822147319258, 12.8 * kRelative);
  const Bend b = bend(testing::jetOf(logarithmic, 2 * pi));
  EXPECT_NEAR(b.k, 0.27908261831252779, 1e-15);
  // k = 1 / (r sqrt(1 + m^2)) and dr/ds = m / sqrt(1 + m^2), so dk/ds = -m k^2.
  EXPECT_NEAR(b.dkds, -0.2 * b.k * b.k, 1e-14);
}

// Encyclopaedia Britannica 1911 (s = c sinh(x/c)); curvature computed, k = 1 / (c cosh^2(x/c)).
TEST(PublishedCatenary, HasItsLengthAndCurvature) {
  const double c = 50.0;
  const auto catenary = [c](const Taylor& t) { return std::pair{t, Taylor(c) * cosh(t / Taylor(c))}; };
  EXPECT_NEAR(formulaLength(catenary, -40, 40), 88.810598218762301, 88.8 * kRelative);
  EXPECT_NEAR(formulaCurvature(catenary, 40), 0.011181103354644880, 1e-15);
  // A C2 cubic through 400 of its points: the length differs by O(h^4).
  EXPECT_NEAR(lengthOf(throughPoints(catenary, -40, 40, 400)), 88.810598218762301, 1e-9);
}

// Computed: s(2) = ln cosh 2 on (t - tanh t, sech t).
TEST(PublishedTractrix, HasItsLengthAndCurvature) {
  const auto tractrix = [](const Taylor& t) { return std::pair{t - tanh(t), Taylor(1) / cosh(t)}; };
  EXPECT_NEAR(formulaLength(tractrix, 0, 2), 1.3250027473578644, kRelative);
  EXPECT_NEAR(formulaCurvature(tractrix, 2), 0.27572056477178321, 1e-14);
}

// Computed: the involute of a circle has s = r t^2 / 2 and k = 1 / (r t).
TEST(PublishedInvolute, HasItsLengthAndCurvature) {
  const auto involute = [](const Taylor& t) {
    return std::pair{Taylor(10) * (cos(t) + t * sin(t)), Taylor(10) * (sin(t) - t * cos(t))};
  };
  EXPECT_NEAR(formulaLength(involute, 0, 2), 20.0, 20 * kRelative);
  const Bend b = bend(testing::jetOf(involute, 2));
  EXPECT_NEAR(b.k, 0.05, 1e-15);
  EXPECT_NEAR(b.dkds, -0.05 * 0.05 * 0.05 * 10, 1e-15);  // k = (2 r s)^(-1/2), so dk/ds = -r k^3
}

Vec2 fresnel(double t) {  // the integrals of cos and sin of pi x^2 / 2 from 0 to t
  Vec2 sum;
  for (int i = 0; i < 16; ++i) {
    const double a = t * i / 16, b = t * (i + 1) / 16;
    sum.x += numeric::gauss10([](double x) { return std::cos(pi * x * x / 2); }, a, b);
    sum.y += numeric::gauss10([](double x) { return std::sin(pi * x * x / 2); }, a, b);
  }
  return sum;
}

// DLMF chapter 7.
TEST(GaussLegendre, GivesFresnelIntegrals) {
  const std::vector<std::pair<double, Vec2>> table = {{0.5, {0.492344225871446, 0.0647324328599993}},
                                                      {1.0, {0.779893400376823, 0.438259147390355}},
                                                      {1.5, {0.445261176039822, 0.697504960082093}},
                                                      {2.0, {0.488253406075341, 0.343415678363698}}};
  for (const auto& [t, value] : table) {
    EXPECT_NEAR(fresnel(t).x, value.x, 1e-14);
    EXPECT_NEAR(fresnel(t).y, value.y, 1e-14);
  }
}

// A surveying manual prints L, tau and X to 63.348 for the clothoid A = 80, R = 100 (metres); the rest
// computed.
TEST(PublishedClothoid, KeepsItsLengthAndCurvatureWhenInterpolated) {
  const double a = 80.0, scale = a * std::sqrt(pi), end = 64.0 / scale;
  EXPECT_NEAR(scale * fresnel(end).x, 63.347739560284, 1e-10);
  EXPECT_NEAR(scale * fresnel(end).y, 6.7768968737959, 1e-10);
  EXPECT_NEAR(scale * fresnel(end).y - 100 * (1 - std::cos(0.32)), 1.7004386820400, 1e-10);
  std::vector<Vec2> points;
  for (int i = 0; i <= 200; ++i) points.push_back(scale * fresnel(end * i / 200));
  const Vec2 from{1, 0}, to{std::cos(0.32), std::sin(0.32)};
  const Curve c(*interpolateCubic(points, &from, &to));
  EXPECT_NEAR(lengthOf(c), 64.0, 1e-9);
  for (double s : {10.0, 30.0, 60.0}) {
    const auto u = parameterAtLength(c, c.first(), s);
    ASSERT_TRUE(u);
    EXPECT_NEAR(bend(c.jet(*u)).k, s / (a * a), 1e-6);  // O(h^2) of the interpolation
    EXPECT_NEAR(bend(c.jet(*u)).dkds, 1 / (a * a), 5e-6);
  }
}

// The NURBS Book, example 2.3 (from memory; recomputed): N2,2 = 1/8, N3,2 = 6/8, N4,2 = 1/8 at u = 5/2.
TEST(PublishedSplines, HaveTheTextbookBasisFunctions) {
  const std::vector<double> expected = {0, 0, 1.0 / 8, 6.0 / 8, 1.0 / 8, 0, 0, 0};
  for (std::size_t i = 0; i < 8; ++i) {
    std::vector<Vec2> poles(8);
    poles[i] = {1, 0};
    const auto n = makeNurbs(2, {0, 0, 0, 1, 2, 3, 4, 4, 5, 5, 5}, poles);
    ASSERT_TRUE(n);
    EXPECT_NEAR(Curve(*n).point(2.5).x, expected[i], 1e-15) << "function " << i;
  }
}

// Computed: the usual cubic stand-in for a quarter circle, handle 0.55228474983079340.
TEST(PublishedSplines, MissACircleByTheKnownError) {
  const double h = 0.55228474983079340;
  const Curve c = testing::bezier({{1, 0}, {1, h}, {h, 1}, {0, 1}});
  EXPECT_NEAR(lengthOf(c), 1.57101669807386, 1e-13);
  EXPECT_NEAR(bend(c.jet(0.5)).k, 0.993757645304129, 1e-13);
  double largest = 0.0;
  for (int i = 0; i <= 10000; ++i) largest = std::max(largest, std::abs(norm(c.point(i / 10000.0)) - 1));
  EXPECT_NEAR(largest, 2.7253e-4, 1e-8);
}

// Computed.
TEST(PublishedSplines, CubicWithAnInflectionHasItsLengthAndCurvature) {
  const Curve c = testing::bezier({{0, 0}, {0, 50}, {50, 100}, {100, 100}});
  EXPECT_NEAR(lengthOf(c), 154.886798803186, 1e-10);
  EXPECT_NEAR(bend(c.jet(0.0)).k, -1.0 / 75, 1e-15);
  EXPECT_NEAR(bend(c.jet(1.0)).k, -1.0 / 75, 1e-15);
  EXPECT_NEAR(bend(c.jet(0.5)).k, -0.00838052481406279, 1e-15);
}

// Computed: x = t - t^3/3, y = t^2 has speed 1 + t^2, so L = 4/3 on [0, 1].
TEST(PublishedSplines, PythagoreanHodographHasAPolynomialLength) {
  const Curve c = testing::bezierFromPowers({0, 1, 0, -1.0 / 3}, {0, 0, 1, 0});
  EXPECT_NEAR(lengthOf(c), 4.0 / 3, 1e-15);
  EXPECT_NEAR(bend(c.jet(0.0)).k, 2.0, 1e-14);
  EXPECT_NEAR(bend(c.jet(1.0)).k, 0.5, 1e-15);
  for (double t : {0.1, 0.5, 0.9}) {
    const auto u = parameterAtLength(c, 0.0, t + t * t * t / 3);
    ASSERT_TRUE(u);
    EXPECT_NEAR(*u, t, 1e-12);
    // k = 2 / (1 + t^2)^2, dk/ds = -8 t / (1 + t^2)^4
    EXPECT_NEAR(bend(c.jet(t)).dkds, -8 * t / std::pow(1 + t * t, 4), 1e-13);
  }
}

}  // namespace
}  // namespace kf::curve
