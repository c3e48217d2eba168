// Blends at joints: deviation, curvature continuity, shares of short neighbours, and choices by hand.
// Lengths in mm, angles in rad.
#include "core/construct/blend.h"

#include <gtest/gtest.h>

#include <numbers>
#include <random>

#include "core/construct/shares.h"
#include "core/curve/arc_length.h"
#include "sampled_distance.h"

namespace kf::construct {
namespace {

using contour::Contour;
using contour::JointKind;
using curve::Arc;
using curve::Line;
using curve::Vec2;

constexpr double kPi = std::numbers::pi;

BlendReport blended(const Contour& c, double tolerance) {
  BlendOptions options;
  options.tolerance = tolerance;
  RunControl control;
  auto report = blendJoints(c, options, control);
  EXPECT_TRUE(report.ok()) << (report.ok() ? "" : report.error().message);
  return report.ok() ? *report : BlendReport{};
}

Contour corner(double degrees, double leg) {
  const double turn = degrees * kPi / 180.0;
  return test::polygon({{-leg, 0.0}, {0.0, 0.0}, {leg * std::cos(turn), leg * std::sin(turn)}}, false);
}

void expectDrivable(const Contour& driven, const char* what) {
  for (const contour::Joint& joint : contour::findJoints(driven)) {
    if (joint.before + 1 == driven.segments.size()) continue;  // the start of a closed contour
    EXPECT_LT(joint.gap, 1e-12) << what << " at s " << joint.s;
    EXPECT_LT(std::abs(joint.turn), 1e-7) << what << " at s " << joint.s;
    EXPECT_EQ(joint.kind, JointKind::smooth)
        << what << " at s " << joint.s << ", step " << joint.curvatureChange;
  }
}

// Largest curvature times deviation at turns of 30, 90 and 135 degrees: no worse than the best of circular
// arc (no curvature continuity), quintic B-spline after Hu, Jiang et al., CIRP JMST 52:36 (2024), and
// clothoid pair, of those that are curvature-continuous: 0.043, 0.556, 2.19.
TEST(Blend, BendsLessThanPublishedCornerBlends) {
  for (const auto& [degrees, best] :
       {std::pair{30.0, 0.043}, std::pair{90.0, 0.556}, std::pair{135.0, 2.19}}) {
    const Contour c = corner(degrees, 50.0);
    const auto report = blended(c, 0.02);
    ASSERT_EQ(report.blended, 1u);
    const double true_ = test::hausdorff(report.driven, c, 500);
    EXPECT_LT(report.joints[0].largestCurvature * true_, best) << degrees;
  }
}

TEST(Blend, UsesTheToleranceAndNeverExceedsIt) {
  for (double degrees : {2.0, 10.0, 45.0, 90.0, 120.0, 150.0, 169.0}) {
    for (double tolerance : {0.001, 0.02, 0.5}) {
      const Contour c = corner(degrees, 400.0 * tolerance + 60.0);
      const auto report = blended(c, tolerance);
      ASSERT_EQ(report.blended, 1u) << degrees;
      const double sampled = test::hausdorff(report.driven, c, 500);
      EXPECT_LE(report.joints[0].deviation, tolerance);
      EXPECT_LE(sampled, report.joints[0].deviation) << degrees;
      EXPECT_GT(sampled, 0.93 * tolerance) << degrees;
      expectDrivable(report.driven, "corner");
    }
  }
}

TEST(Blend, SmoothsCurvatureStepsOfARoundedRectangle) {
  Contour c;
  c.closed = true;
  const double a = 30.0, b = 20.0, r = 5.0;
  c.segments.push_back({Line{{r, 0}, {a - r, 0}}, ""});
  c.segments.push_back({Arc{{a - r, r}, r, -kPi / 2, kPi / 2}, ""});
  c.segments.push_back({Line{{a, r}, {a, b - r}}, ""});
  c.segments.push_back({Arc{{a - r, b - r}, r, 0, kPi / 2}, ""});
  c.segments.push_back({Line{{a - r, b}, {r, b}}, ""});
  c.segments.push_back({Arc{{r, b - r}, r, kPi / 2, kPi / 2}, ""});
  c.segments.push_back({Line{{0, b - r}, {0, r}}, ""});
  c.segments.push_back({Arc{{r, r}, r, kPi, kPi / 2}, ""});
  const auto report = blended(c, 0.02);
  EXPECT_EQ(report.blended, 7u);
  EXPECT_EQ(report.stopped, 1u) << "the start, where the motion rests";
  expectDrivable(report.driven, "rounded rectangle");
  EXPECT_LE(test::hausdorff(report.driven, c, 400), 0.02);
  for (const JointReport& joint : report.joints) {
    if (joint.treatment != Treatment::blended) continue;
    EXPECT_LT(joint.largestCurvature, 1.15 / r) << "little more than the arc's own";
  }
  BlendOptions options;
  options.closingJoint = true;
  RunControl control;
  const auto all = blendJoints(c, options, control);
  ASSERT_TRUE(all.ok());
  EXPECT_EQ(all->blended, 8u);
  EXPECT_EQ(all->stopped, 0u);
  for (const contour::Joint& joint : contour::findJoints(all->driven))
    EXPECT_EQ(joint.kind, JointKind::smooth);
}

TEST(Blend, JoinsCurvesOfEveryKind) {
  // line, elliptic arc, spline, arc: each joint a break.
  Contour c;
  c.segments.push_back({Line{{-20, 3}, {0, 0}}, ""});
  c.segments.push_back({curve::EllipticArc{{10, 0}, {-10, 0}, {0, 6}, 0.0, kPi}, ""});
  auto spline = curve::interpolateCubic({{20, 0}, {25, 7}, {33, 4}, {40, 9}});
  ASSERT_TRUE(spline.ok());
  c.segments.push_back({*spline, ""});
  c.segments.push_back({Arc{{40, 14}, 5.0, -kPi / 2, -1.2}, ""});
  c.segments.push_back({Line{c.segments.back().curve.endPoint(), {60, 40}}, ""});
  const auto report = blended(c, 0.05);
  EXPECT_EQ(report.blended, 4u);
  expectDrivable(report.driven, "mixed");
  const double sampled = test::hausdorff(report.driven, c, 400);
  EXPECT_LE(sampled, report.largestDeviation + 1e-6);
  EXPECT_LE(report.largestDeviation, 0.05);
}

TEST(Blend, SharesShortNeighboursFullyAndFairly) {
  // A zigzag of 0.1 mm pieces between two long legs: the tolerance alone would ask for about 1.6 mm on each
  // side.
  std::vector<Vec2> points{{-50, 0}, {0, 0}, {0.1, 0.1}, {0.2, 0.1}, {50, 40}};
  const auto report = blended(test::polygon(points, false), 0.5);
  ASSERT_EQ(report.blended, 3u);
  const auto& j = report.joints;
  const double first = std::hypot(0.1, 0.1), second = 0.1;
  // Nothing is left unused on the shorter piece, and the outer joint takes what the inner one leaves.
  EXPECT_NEAR(j[1].trim + j[2].trim, second, 1e-6);
  EXPECT_NEAR(j[0].trim + j[1].trim, first, 0.03 * first);
  expectDrivable(report.driven, "zigzag");
}

TEST(FairShares, CannotRaiseOneWithoutLoweringAPoorerOne) {
  std::mt19937 random(7);
  std::uniform_real_distribution<double> uniform(0.1, 3.0);
  for (int trial = 0; trial < 300; ++trial) {
    const std::size_t n = 1 + random() % 12;
    const bool closed = trial % 2 == 0;
    std::vector<double> lengths(n), wanted(n);
    for (double& x : lengths) x = uniform(random);
    for (double& x : wanted) x = uniform(random);
    const auto share = fairShares(lengths, wanted, closed);
    const auto level = [&](std::size_t joint) { return share[joint] / wanted[joint]; };
    for (std::size_t i = 0; i < n; ++i) {
      double used = share[i];
      if (i > 0 || closed) used += share[i > 0 ? i - 1 : n - 1];
      EXPECT_LE(used, lengths[i] * (1 + 1e-12));
    }
    for (std::size_t j = 0; j < (closed ? n : n - 1); ++j) {
      EXPECT_LE(share[j], wanted[j]);
      if (share[j] >= wanted[j] * (1 - 1e-12)) continue;
      // Some neighbour segment is full and its other joint is no richer.
      bool bound = false;
      for (std::size_t segment : {j, (j + 1) % n}) {
        const std::size_t start = segment > 0 ? segment - 1 : n - 1;
        const bool hasStart = segment > 0 || closed;
        const double used = share[segment] + (hasStart ? share[start] : 0.0);
        const std::size_t other = segment == j ? start : segment;
        const bool hasOther = segment == j ? hasStart : true;
        if (used >= lengths[segment] * (1 - 1e-9) && (!hasOther || level(other) <= level(j) * (1 + 1e-9)))
          bound = true;
      }
      EXPECT_TRUE(bound) << "trial " << trial << " joint " << j;
    }
  }
}

TEST(Blend, FollowsChoicesByHand) {
  const Contour c = test::polygon({{0, 0}, {50, 0}, {50, 50}, {0, 50}}, true);
  BlendOptions options;
  options.tolerance = 0.02;
  options.byHand = {{0, false, {}}, {1, true, 0.2}};
  RunControl control;
  const auto report = blendJoints(c, options, control);
  ASSERT_TRUE(report.ok());
  EXPECT_EQ(report->joints[0].treatment, Treatment::stopped);
  EXPECT_EQ(report->joints[1].treatment, Treatment::blended);
  EXPECT_GT(report->joints[1].deviation, 0.18);
  EXPECT_LE(report->joints[1].deviation, 0.2);
  EXPECT_LE(report->joints[2].deviation, 0.02);
}

TEST(Blend, KeepsWhatIsSmoothAndWhatDoublesBack) {
  Contour circle;
  circle.closed = true;
  circle.segments.push_back({Arc{{0, 0}, 10, 0, 2 * kPi}, ""});
  const auto same = blended(circle, 0.02);
  EXPECT_EQ(same.blended + same.stopped, 0u);
  EXPECT_EQ(same.driven.segments.size(), 1u);
  const auto back = blended(corner(179.0, 10.0), 0.02);
  EXPECT_EQ(back.stopped, 1u);
}

TEST(Blend, BlendsTheOnlyJointOfADrop) {
  // One spline that starts and ends in the same corner.
  auto spline = curve::interpolateCubic({{0, 0}, {8, 5}, {14, 0}, {8, -5}, {0, 0.0}},
                                        std::array<Vec2, 1>{Vec2{1, 0.4}}.data(),
                                        std::array<Vec2, 1>{Vec2{-1, 0.5}}.data());
  ASSERT_TRUE(spline.ok());
  Contour c;
  c.closed = true;
  c.segments.push_back({*spline, ""});
  BlendOptions options;
  options.closingJoint = true;
  options.tolerance = 0.1;
  RunControl control;
  const auto report = blendJoints(c, options, control);
  ASSERT_TRUE(report.ok());
  EXPECT_EQ(report->blended, 1u);
  EXPECT_LE(test::hausdorff(report->driven, c, 1500), 0.1);
  for (const auto& joint : contour::findJoints(report->driven)) EXPECT_EQ(joint.kind, JointKind::smooth);
}

TEST(Blend, RefusesWhatItCannotUse) {
  RunControl control;
  BlendOptions options;
  options.tolerance = 0.0;
  EXPECT_FALSE(blendJoints(corner(90, 1), options, control).ok());
  options.tolerance = 0.01;
  EXPECT_FALSE(blendJoints(Contour{}, options, control).ok());
  options.byHand = {{17, true, {}}};
  EXPECT_FALSE(blendJoints(corner(90, 1), options, control).ok());
}

TEST(Blend, HoldsOnRandomChainsOfLinesAndArcs) {
  std::mt19937 random(20);
  std::uniform_real_distribution<double> uniform(0.0, 1.0);
  for (int trial = 0; trial < 60; ++trial) {
    Contour c;
    Vec2 at{0, 0};
    double heading = 0.0;
    for (int i = 0; i < 12; ++i) {
      heading += (uniform(random) < 0.3 ? 0.0 : 4.0 * (uniform(random) - 0.5));
      const double length = std::pow(10.0, 3.0 * uniform(random) - 2.0);
      if (uniform(random) < 0.5) {
        const Vec2 to = at + length * Vec2{std::cos(heading), std::sin(heading)};
        c.segments.push_back({Line{at, to}, ""});
        at = to;
      } else {
        const double sweep = (uniform(random) < 0.5 ? -1 : 1) * (0.2 + 2.5 * uniform(random));
        const double radius = length / std::abs(sweep), side = sweep > 0 ? 1.0 : -1.0;
        const Vec2 normal{-std::sin(heading), std::cos(heading)};
        const Arc arc{at + (side * radius) * normal, radius, heading - side * kPi / 2, sweep};
        c.segments.push_back({arc, ""});
        at = c.segments.back().curve.endPoint();
        heading += sweep;
      }
    }
    const auto report = blended(c, 0.02);
    EXPECT_LE(report.largestDeviation, 0.02);
    EXPECT_LE(test::oneWay(report.driven, c, 120), report.largestDeviation + 2e-5) << "trial " << trial;
    for (const contour::Joint& joint : contour::findJoints(report.driven)) EXPECT_LT(joint.gap, 1e-9);
    EXPECT_GE(report.blended, 5u) << "trial " << trial;
  }
}

}  // namespace
}  // namespace kf::construct
