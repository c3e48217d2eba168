// Node placement and evaluation between nodes.
// Lengths in mm, angles in rad.
#include "core/path/path.h"

#include <gtest/gtest.h>

#include <algorithm>
#include <cmath>
#include <numbers>

#include "core/curve/arc_length.h"
#include "tests/support/butterfly.h"
#include "tests/support/random_spline.h"
#include "tests/support/trig_curve.h"

namespace kf::path {
namespace {

using contour::Contour;
using curve::Arc;
using curve::Curve;
using curve::Line;
using curve::Vec2;
using std::numbers::pi;

Contour contourOf(std::vector<Curve> curves, bool closed) {
  Contour c;
  c.name = "test";
  c.closed = closed;
  for (Curve& each : curves) c.segments.push_back({std::move(each), "curve"});
  return c;
}

Result<Path> build(const Contour& contour, std::size_t nodes = 2000, bool graded = false) {
  RunControl control;
  Options options;
  options.targetNodes = nodes;
  options.gradeAtStops = graded;
  return buildPath(contour, options, control);
}

void expectFinite(const Path& p) {
  for (const auto* values : {&p.x, &p.y, &p.tx, &p.ty, &p.k, &p.dk, &p.u}) {
    ASSERT_EQ(values->size(), p.size());
    for (double v : *values) ASSERT_TRUE(std::isfinite(v));
  }
  ASSERT_EQ(p.segment.size(), p.size());
  ASSERT_EQ(p.breakAfter.size(), p.size());
  for (std::size_t i = 0; i < p.size(); ++i) EXPECT_NEAR(std::hypot(p.tx[i], p.ty[i]), 1.0, 1e-12);
}

// The invariants that path.h states.
void expectInvariants(const Path& p) {
  ASSERT_GE(p.size(), 2u);
  expectFinite(p);
  EXPECT_EQ(p.s.front(), 0.0);
  EXPECT_EQ(p.s.back(), p.length);
  bool cellSinceBreak = false;
  for (std::size_t i = 0; i + 1 < p.size(); ++i) {
    const double chord = std::hypot(p.x[i + 1] - p.x[i], p.y[i + 1] - p.y[i]);
    EXPECT_GE(p.s[i + 1], p.s[i]);
    EXPECT_EQ(p.s[i] == p.s[i + 1], p.breakAfter[i] != BreakKind::none) << "node " << i << " of " << p.size();
    if (p.breakAfter[i] == BreakKind::none) {
      cellSinceBreak = true;
      EXPECT_EQ(p.segment[i], p.segment[i + 1]);
      EXPECT_LE(chord, (p.s[i + 1] - p.s[i]) * (1 + 1e-9) + 1e-11);
    } else {
      EXPECT_TRUE(cellSinceBreak) << "two breaks in a row at node " << i;
      cellSinceBreak = false;
      EXPECT_NEAR(chord, 0.0, 1e-9 * (1 + p.length));
    }
  }
}

// Arc length at each node against a separate run of the adaptive rule.
void expectLengths(const Path& p) {
  double before = 0.0;
  std::vector<double> starts;
  for (const auto& segment : p.contour().segments) {
    starts.push_back(before);
    before += curve::totalLength(segment.curve);
  }
  EXPECT_NEAR(p.length, before, 1e-10 * before);
  for (std::size_t i = 0; i < p.size(); ++i) {
    const Curve& c = p.contour().segments[p.segment[i]].curve;
    const double s = starts[p.segment[i]] + curve::arcLength(c, c.first(), p.u[i])->length;
    EXPECT_NEAR(p.s[i], s, 1e-10 * p.length) << "node " << i;
  }
}

bool hasNode(const Path& p, Vec2 at, double within) {
  for (std::size_t i = 0; i < p.size(); ++i) {
    if (std::hypot(p.x[i] - at.x, p.y[i] - at.y) <= within) return true;
  }
  return false;
}

// Within a cell nothing changes its sign that should have a node: x', y' and dk/ds.
void expectNodesOnSignChanges(const Path& p) {
  const auto crosses = [](double a, double b, double least) {
    return a * b < 0.0 && std::min(std::abs(a), std::abs(b)) > least;
  };
  const auto [low, high] = std::minmax_element(p.dk.begin(), p.dk.end());
  const double slope = std::max(-*low, *high);
  for (std::size_t i = 0; i + 1 < p.size(); ++i) {
    if (p.breakAfter[i] != BreakKind::none) continue;
    EXPECT_FALSE(crosses(p.tx[i], p.tx[i + 1], 1e-7)) << "x' at s = " << p.s[i];
    EXPECT_FALSE(crosses(p.ty[i], p.ty[i + 1], 1e-7)) << "y' at s = " << p.s[i];
    EXPECT_FALSE(crosses(p.dk[i], p.dk[i + 1], 1e-9 * slope)) << "k at s = " << p.s[i];
  }
}

std::size_t countOf(const Path& p, BreakKind kind) {
  return static_cast<std::size_t>(std::count(p.breakAfter.begin(), p.breakAfter.end(), kind));
}

TEST(Nodes, KeepTheInvariantsOnRandomSplines) {
  std::mt19937_64 random(5);
  for (int i = 0; i < 300; ++i) {
    SCOPED_TRACE("seed 5, spline " + std::to_string(i));
    const Contour c = contourOf({Curve(testing::randomSpline(random, {2, 6, 5.0, false, false}))}, false);
    const auto p = build(c, 1 + random() % 400, random() % 2 == 0);
    ASSERT_TRUE(p) << p.error().message;
    expectInvariants(*p);
    expectLengths(*p);
  }
}

TEST(Nodes, StandOnEveryZeroAndExtremum) {
  std::mt19937_64 random(6);
  for (int i = 0; i < 200; ++i) {
    SCOPED_TRACE("seed 6, spline " + std::to_string(i));
    const auto p =
        build(contourOf({Curve(testing::randomSpline(random, {3, 5, 3.0, false, false}))}, false), 20);
    ASSERT_TRUE(p) << p.error().message;
    expectNodesOnSignChanges(*p);
  }
}

// Symmetric curves have their extremum exactly where a scan would sample.
TEST(Nodes, StandOnTheMiddleOfASymmetricCurve) {
  const Curve parabola = testing::bezier({{-30, 20}, {0, -20}, {30, 20}});
  const Curve bend = testing::bezier({{0, 0}, {0, 50}, {50, 100}, {100, 100}});
  const Curve wave = testing::bezier({{0, 0}, {10, 20}, {50, -20}, {60, 0}});
  for (std::size_t nodes : {5u, 6u, 7u, 8u, 9u, 10u, 11u, 12u}) {
    for (const Curve& c : {parabola, bend, wave}) {
      const auto p = build(contourOf({c}, false), nodes);
      ASSERT_TRUE(p);
      if (c.point(0.0).y != 0.0 || c.point(1.0).y != 0.0) {
        EXPECT_TRUE(hasNode(*p, c.point(0.5), 1e-9)) << nodes;
      }
      expectNodesOnSignChanges(*p);
    }
  }
}

// Four-vertex theorem: an ellipse has exactly four curvature extrema, at the ends of its axes.
TEST(Nodes, StandOnTheFourVerticesOfAnEllipse) {
  for (double tilt : {0.0, 0.3, pi / 4}) {
    const curve::Affine2 turn = curve::Affine2::rotation(tilt);
    const Curve e = Curve(curve::EllipticArc{{5, 6}, {50, 0}, {0, 30}, 0.4, 2 * pi}).transformed(turn);
    const auto p = build(contourOf({e}, true), 200);
    ASSERT_TRUE(p);
    expectInvariants(*p);
    expectNodesOnSignChanges(*p);
    for (Vec2 v : {Vec2{50, 0}, Vec2{-50, 0}, Vec2{0, 30}, Vec2{0, -30}})
      EXPECT_TRUE(hasNode(*p, turn.point(Vec2{5, 6} + v), 1e-5));
    int changes = 0;
    for (std::size_t i = 0; i + 2 < p->size(); ++i)
      changes += (p->k[i + 1] - p->k[i]) * (p->k[i + 2] - p->k[i + 1]) < 0.0 ? 1 : 0;
    EXPECT_EQ(changes, 4);
    EXPECT_NEAR(p->length, 255.26998863398128, 1e-9);  // DLMF 19.30(i)
  }
}

TEST(Nodes, StandOnTheQuartersOfACircle) {
  const auto p = build(contourOf({Arc{{3, 4}, 10, 0.3, 2 * pi}}, true), 37);
  ASSERT_TRUE(p);
  expectInvariants(*p);
  for (Vec2 v : {Vec2{10, 0}, Vec2{-10, 0}, Vec2{0, 10}, Vec2{0, -10}})
    EXPECT_TRUE(hasNode(*p, Vec2{3, 4} + v, 1e-9));
  for (double k : p->k) EXPECT_NEAR(k, 0.1, 1e-15);
  for (double dk : p->dk) EXPECT_NEAR(dk, 0.0, 1e-15);
  EXPECT_NEAR(p->length, 20 * pi, 1e-12);
}

// Length 382.859558 and largest curvature 43.251 at u = 0.25635: computed with scipy 1.10.1 from the data of
// Hu, Jiang, Huo et al., IJAMT 129:2843, 2023.
TEST(Butterfly, HasItsLengthAndTightestBend) {
  const auto p = build(contourOf({Curve(testing::butterfly())}, true));
  ASSERT_TRUE(p);
  expectInvariants(*p);
  expectLengths(*p);
  expectNodesOnSignChanges(*p);
  EXPECT_NEAR(p->length, 382.859558, 5e-7);
  const auto largest = std::max_element(p->k.begin(), p->k.end(),
                                        [](double a, double b) { return std::abs(a) < std::abs(b); });
  EXPECT_NEAR(std::abs(*largest), 43.251, 5e-4);
  EXPECT_NEAR(p->u[static_cast<std::size_t>(largest - p->k.begin())], 0.25635, 5e-6);
}

// Hopf: the integral of k ds and the turn at the joint add up to one turn; by Simpson's rule.
TEST(Butterfly, TurnsOnce) {
  const auto p = build(contourOf({Curve(testing::butterfly())}, true), 20000);
  ASSERT_TRUE(p);
  double sum = std::atan2(p->tx.back() * p->ty.front() - p->ty.back() * p->tx.front(),
                          p->tx.back() * p->tx.front() + p->ty.back() * p->ty.front());
  std::size_t hint = 0;
  for (std::size_t i = 0; i + 1 < p->size(); ++i) {
    const double h = p->s[i + 1] - p->s[i];
    if (h > 0.0) sum += h / 6 * (p->k[i] + 4 * p->sample(p->s[i] + h / 2, hint).k + p->k[i + 1]);
  }
  EXPECT_NEAR(std::abs(sum), 2 * pi, 1e-6);
}

TEST(Sample, LiesOnTheCurveAtItsLength) {
  std::mt19937_64 random(9);
  for (int i = 0; i < 200; ++i) {
    SCOPED_TRACE("seed 9, spline " + std::to_string(i));
    const Contour c = contourOf({Curve(testing::randomSpline(random, {2, 5, 4.0, false, false}))}, false);
    const auto p = build(c, 10 + random() % 300);
    ASSERT_TRUE(p);
    std::size_t hint = 0;
    const Curve& whole = c.segments[0].curve;
    for (int j = 0; j <= 40; ++j) {
      const double s = p->length * j / 40;
      const Sample sample = p->sample(s, hint), again = p->sample(s);
      EXPECT_EQ(sample.x, again.x);
      EXPECT_EQ(sample.k, again.k);
      const auto u = curve::parameterAtLength(whole, whole.first(), s);
      ASSERT_TRUE(u);
      EXPECT_NEAR(curve::distance({sample.x, sample.y}, whole.point(*u)), 0.0, 1e-10 * p->length);
    }
  }
}

TEST(Sample, ClampsAndTakesTheLaterSideOfABreak) {
  const auto p = build(contourOf({Line{{0, 0}, {10, 0}}, Line{{10, 0}, {10, 5}}}, false), 20);
  ASSERT_TRUE(p);
  expectInvariants(*p);
  EXPECT_EQ(p->sample(-1).x, 0.0);
  EXPECT_NEAR(p->sample(99).y, 5.0, 1e-15);
  EXPECT_NEAR(p->sample(10).ty, 1.0, 1e-15);
  EXPECT_NEAR(p->sample(10 - 1e-9).tx, 1.0, 1e-15);
  std::size_t hint = 100000;  // a stale hint is no harm
  EXPECT_NEAR(p->sample(3, hint).x, 3.0, 1e-14);
  hint = 0;
  EXPECT_NEAR(p->sample(12, hint).y, 2.0, 1e-14);
  EXPECT_NEAR(p->sample(3, hint).x, 3.0, 1e-14);
}

TEST(Breaks, AreOfTheirKind) {
  const auto p = build(contourOf({Line{{-50, -20}, {50, -20}}, Arc{{50, 0}, 20, -pi / 2, pi},
                                  Line{{50, 20}, {-50, 20}}, Line{{-50, 20}, {-50, -20}}},
                                 true),
                       100);
  ASSERT_TRUE(p);
  expectInvariants(*p);
  std::vector<BreakKind> kinds;
  std::copy_if(p->breakAfter.begin(), p->breakAfter.end(), std::back_inserter(kinds),
               [](BreakKind kind) { return kind != BreakKind::none && kind != BreakKind::smooth; });
  EXPECT_EQ(kinds, (std::vector<BreakKind>{BreakKind::curvatureStep, BreakKind::curvatureStep,
                                           BreakKind::tangentBreak, BreakKind::tangentBreak}));
  EXPECT_EQ(p->breakAfter.back(), BreakKind::tangentBreak);
}

// (0,0)(100,100)(0,100)(100,0) has no speed at u = 1/2, and the motion turns back there.
TEST(InnerCusp, IsATangentBreak) {
  for (double shift : {0.0, 7.3}) {
    const Curve cusp = testing::bezier({{shift, 0}, {100 + shift, 100}, {shift, 100}, {100 + shift, 0}});
    const auto p = build(contourOf({cusp}, false), 100);
    ASSERT_TRUE(p) << p.error().message;
    expectInvariants(*p);
    EXPECT_EQ(countOf(*p, BreakKind::tangentBreak), 1u);
    EXPECT_TRUE(hasNode(*p, {50 + shift, 75}, 1e-9));
  }
}

// Poles on one line that fold back: speed 0 where the motion turns.
TEST(FoldedLine, IsATangentBreakWhereItTurns) {
  const auto p = build(contourOf({testing::bezier({{0, 0}, {100, 0}, {50, 0}})}, false), 100);
  ASSERT_TRUE(p) << p.error().message;
  expectInvariants(*p);
  EXPECT_EQ(countOf(*p, BreakKind::tangentBreak), 1u);
  EXPECT_TRUE(hasNode(*p, {200.0 / 3, 0}, 1e-9));  // x = 200 u - 150 u^2, largest at u = 2/3
  EXPECT_NEAR(p->length, 200.0 / 3 + 50.0 / 3, 1e-9);
}

TEST(BuildPath, RefusesWhatCannotBeDriven) {
  EXPECT_FALSE(build(contourOf({}, false)));
  const auto none = build(contourOf({testing::bezier({{1, 1}, {1, 1}, {1, 1}})}, false));
  ASSERT_FALSE(none);
  EXPECT_EQ(none.error().code, ErrorCode::invalidArgument);
  EXPECT_NE(none.error().message.find("test"), std::string::npos) << none.error().message;
  for (double bad : {std::nan(""), HUGE_VAL}) {
    const auto refused = build(contourOf({Line{{0, 0}, {bad, 1}}}, false));
    ASSERT_FALSE(refused);
    EXPECT_EQ(refused.error().code, ErrorCode::invalidArgument) << refused.error().message;
  }
  RunControl control;
  control.cancel();
  const auto stopped = buildPath(contourOf({Line{{0, 0}, {1, 1}}}, false), {}, control);
  ASSERT_FALSE(stopped);
  EXPECT_EQ(stopped.error().code, ErrorCode::cancelled);
}

TEST(DoubledPoles, LeaveNoEmptyCells) {
  const auto p = build(contourOf(
      {testing::bezier({{0, 0}, {0, 0}, {10, 10}, {20, 0}, {20, 0}}), Line{{20, 0}, {30, 0}}}, false));
  ASSERT_TRUE(p) << p.error().message;
  expectInvariants(*p);
  expectLengths(*p);
}

TEST(NodeCount, FollowsTheTarget) {
  for (std::size_t target : {500u, 2000u, 20000u}) {
    const auto p = build(contourOf({Curve(testing::butterfly())}, true), target);
    ASSERT_TRUE(p);
    EXPECT_GT(p->size(), target / 2);
    EXPECT_LT(p->size(), target * 2 + 300);
  }
}

TEST(HugeCoordinates, KeepThePath) {
  const Curve far = Curve(testing::butterfly()).transformed(curve::Affine2::translation({1e6, -1e6}));
  const auto p = build(contourOf({far}, true));
  ASSERT_TRUE(p) << p.error().message;
  expectInvariants(*p);
  EXPECT_NEAR(p->length, 382.859558, 1e-6);
}

}  // namespace
}  // namespace kf::path
