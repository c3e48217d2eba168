// Chaining loose curves: order, direction, gaps, branches, runs of one entity.
// Lengths in mm.
#include "core/contour/chain.h"

#include <algorithm>
#include <cmath>
#include <limits>
#include <numbers>
#include <random>

#include <gmock/gmock.h>
#include <gtest/gtest.h>

namespace kf::contour {
namespace {

using curve::Arc;
using curve::Line;
using curve::Vec2;

constexpr double kPi = std::numbers::pi;

ChainReport chained(const std::vector<LooseCurve>& curves, ChainOptions options = {}) {
  RunControl control;
  auto report = chain(curves, options, control);
  EXPECT_TRUE(report) << report.error().message;
  return report ? std::move(*report) : ChainReport{};
}

LooseCurve line(Vec2 a, Vec2 b, const std::string& layer = "", bool follows = false) {
  return {Line{a, b}, layer, "line", follows};
}

double largestGap(const Contour& c) {
  double largest = 0.0;
  for (std::size_t i = 0; i + (c.closed ? 0 : 1) < c.segments.size(); ++i) {
    const Vec2 end = c.segments[i].curve.endPoint();
    const Vec2 next = c.segments[(i + 1) % c.segments.size()].curve.startPoint();
    largest = std::max(largest, curve::distance(end, next));
  }
  return largest;
}

// A rounded rectangle, 160 x 100 with corners of 18, in loose pieces.
std::vector<LooseCurve> rounded() {
  std::vector<LooseCurve> curves;
  const double r = 18, w = 160, h = 100;
  curves.push_back(line({r, 0}, {w - r, 0}));
  curves.push_back({Arc{{w - r, r}, r, -kPi / 2, kPi / 2}, "", "arc"});
  curves.push_back(line({w, r}, {w, h - r}));
  curves.push_back({Arc{{w - r, h - r}, r, 0, kPi / 2}, "", "arc"});
  curves.push_back(line({w - r, h}, {r, h}));
  curves.push_back({Arc{{r, h - r}, r, kPi / 2, kPi / 2}, "", "arc"});
  curves.push_back(line({0, h - r}, {0, r}));
  curves.push_back({Arc{{r, r}, r, kPi, kPi / 2}, "", "arc"});
  return curves;
}

TEST(Chain, FindsOneClosedContourInAnyOrderAndDirection) {
  constexpr unsigned kSeed = 31;
  std::mt19937_64 random(kSeed);
  const double length = 2 * (160 + 100 - 4 * 18) + 2 * kPi * 18;
  const double area = 160.0 * 100.0 - (4.0 - kPi) * 18 * 18;
  for (int i = 0; i < 200; ++i) {
    auto curves = rounded();
    std::shuffle(curves.begin(), curves.end(), random);
    for (LooseCurve& c : curves) {
      if (random() % 2 == 0) c.curve = c.curve.reversed();
    }
    const ChainReport report = chained(curves);
    ASSERT_EQ(report.contours.size(), 1U) << "seed " << kSeed << ", round " << i;
    const Contour& c = report.contours[0];
    EXPECT_TRUE(c.closed);
    EXPECT_EQ(c.segments.size(), 8U);
    EXPECT_NEAR(kf::contour::length(c), length, 1e-9);
    EXPECT_NEAR(std::abs(signedArea(c)), area, 1e-9);
    EXPECT_LT(largestGap(c), 1e-12);
    EXPECT_EQ(report.branchPoints, 0U);
  }
}

TEST(Chain, KeepsTheDirectionOfTheFirstCurve) {
  const ChainReport report = chained({line({10, 0}, {0, 0}), line({10, 0}, {10, 5}), line({0, 0}, {0, 7})});
  ASSERT_EQ(report.contours.size(), 1U);
  EXPECT_EQ(report.contours[0].segments.front().curve.startPoint(), (Vec2{10, 5}));
  EXPECT_EQ(report.contours[0].segments.back().curve.endPoint(), (Vec2{0, 7}));
}

TEST(Chain, BridgesGapsWithinTheToleranceOnly) {
  const std::vector<LooseCurve> curves = {line({0, 0}, {10, 0}), line({10.009, 0}, {20, 5}),
                                          line({20, 5.011}, {30, 5})};
  const ChainReport report = chained(curves);
  ASSERT_EQ(report.contours.size(), 2U);
  EXPECT_NEAR(report.largestGap, 0.009, 1e-12);
  EXPECT_LT(largestGap(report.contours[0]), 1e-12);
  ChainOptions wide;
  wide.tolerance = 0.02;
  EXPECT_EQ(chained(curves, wide).contours.size(), 1U);
}

TEST(Chain, JoinsTheNearestEndsFirst) {
  // The end at 10 could join 10.008 as well as 10.001.
  const ChainReport report =
      chained({line({0, 0}, {10, 0}), line({10.008, 0}, {20, 9}), line({10.001, 0}, {20, -9})});
  ASSERT_EQ(report.contours.size(), 2U);
  EXPECT_NEAR(report.contours[0].segments.back().curve.endPoint().y, -9.0, 1e-12);
  EXPECT_EQ(report.branchPoints, 1U);
}

TEST(Chain, GoesStraightOnAtACrossing) {
  const ChainReport report =
      chained({line({-10, 0}, {0, 0}), line({0, -10}, {0, 0}), line({0, 0}, {0, 10}), line({0, 0}, {10, 0})});
  ASSERT_EQ(report.contours.size(), 2U);
  EXPECT_EQ(report.contours[0].segments.back().curve.endPoint(), (Vec2{10, 0}));
  EXPECT_EQ(report.contours[1].segments.back().curve.endPoint(), (Vec2{0, 10}));
  EXPECT_EQ(report.branchPoints, 1U);
}

TEST(Chain, LeavesLayersApartUnlessAsked) {
  const std::vector<LooseCurve> curves = {line({0, 0}, {1, 0}, "a"), line({1, 0}, {2, 0}, "b")};
  EXPECT_EQ(chained(curves).contours.size(), 2U);
  ChainOptions across;
  across.acrossLayers = true;
  EXPECT_EQ(chained(curves, across).contours.size(), 1U);
}

TEST(Chain, MakesAFullCircleOrAClosedSplineAContourOfItsOwn) {
  const ChainReport report = chained(
      {{Arc{{0, 0}, 5, 1.0, 2 * kPi}, "", "circle"}, line({5 * std::cos(1.0), 5 * std::sin(1.0)}, {20, 20})});
  ASSERT_EQ(report.contours.size(), 2U);
  EXPECT_TRUE(report.contours[0].closed);
  EXPECT_FALSE(report.contours[1].closed);
}

TEST(Chain, DropsZeroLengthsAndSaysSo) {
  const ChainReport report = chained({line({1, 1}, {1, 1}), line({0, 0}, {1, 0})});
  EXPECT_EQ(report.zeroLengthDropped, 1U);
  EXPECT_EQ(report.contours.size(), 1U);
}

// Points denser than the tolerance: only the order within the entity says what follows what.
TEST(Chain, KeepsARunWhosePointsLieCloserThanTheTolerance) {
  std::vector<LooseCurve> curves;
  Vec2 last{0, 0};
  double length = 0.0;
  std::mt19937_64 random(5);
  std::uniform_real_distribution<double> step(-2e-5, 3e-5);
  for (int i = 0; i < 3000; ++i) {
    const Vec2 next{last.x + step(random), last.y + step(random)};
    length += curve::distance(last, next);
    curves.push_back(line(last, next, "", i > 0));
    last = next;
  }
  const ChainReport report = chained(curves);
  ASSERT_EQ(report.contours.size(), 1U);
  EXPECT_EQ(report.contours[0].segments.size(), 3000U);
  EXPECT_EQ(report.contours[0].segments.back().curve.endPoint(), last);
  EXPECT_NEAR(kf::contour::length(report.contours[0]), length, 1e-9);
}

TEST(Chain, ClosesARunWhoseEndsMeetBeforeItLooksAtOthers) {
  // Two triangles of one corner: without the runs the straightest way would lead from one into the other.
  const ChainReport report = chained(
      {line({0, 0}, {10, 0}), line({10, 0}, {10, 10}, "", true), line({10, 10}, {0, 0}, "", true),
       line({0, 0}, {-10, 0}), line({-10, 0}, {-10, -10}, "", true), line({-10, -10}, {0, 0}, "", true)});
  ASSERT_EQ(report.contours.size(), 2U);
  EXPECT_TRUE(report.contours[0].closed);
  EXPECT_TRUE(report.contours[1].closed);
  EXPECT_EQ(report.contours[0].segments.size(), 3U);
}

TEST(Chain, ACrowdOfEndsAtOnePlaceEndsSoon) {
  std::vector<LooseCurve> curves;
  for (int i = 0; i < 20'000; ++i) {
    const double a = 2 * kPi * i / 20'000;
    curves.push_back(line({1e-4 * std::cos(a), 1e-4 * std::sin(a)}, {50 * std::cos(a), 50 * std::sin(a)}));
  }
  const ChainReport report = chained(curves);
  std::size_t segments = 0;
  for (const Contour& c : report.contours) segments += c.segments.size();
  EXPECT_GE(segments, 20'000U);
  EXPECT_GE(report.branchPoints, 1U);
}

TEST(Chain, RefusesABadToleranceAndNumbersThatAreNotFinite) {
  RunControl control;
  ChainOptions options;
  for (double bad :
       {0.0, -1.0, std::numeric_limits<double>::quiet_NaN(), std::numeric_limits<double>::infinity()}) {
    options.tolerance = bad;
    EXPECT_FALSE(chain({line({0, 0}, {1, 0})}, options, control));
  }
  const auto nan = chain({line({0, 0}, {std::numeric_limits<double>::quiet_NaN(), 0})}, {}, control);
  ASSERT_FALSE(nan);
  EXPECT_EQ(nan.error().code, ErrorCode::invalidArgument);
}

TEST(Chain, CanBeCancelled) {
  RunControl control;
  control.cancel();
  const auto report = chain(rounded(), {}, control);
  ASSERT_FALSE(report);
  EXPECT_EQ(report.error().code, ErrorCode::cancelled);
}

}  // namespace
}  // namespace kf::contour
