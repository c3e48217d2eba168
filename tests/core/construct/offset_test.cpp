// Tool offset: closed forms, published figures, trimming, what stays uncut, and an independent polygon
// offset. Lengths in mm, angles in rad.
#include "core/construct/offset.h"

#include <gtest/gtest.h>

#include <numbers>
#include <random>

#include "core/curve/arc_length.h"
#include "sampled_distance.h"

namespace kf::construct {
namespace {

using contour::Contour;
using curve::Arc;
using curve::EllipticArc;
using curve::Line;
using curve::Vec2;

constexpr double kPi = std::numbers::pi;

OffsetReport offset(const std::vector<Contour>& contours, double radius, ToolSide side) {
  OffsetOptions options;
  options.radius = radius;
  options.side = side;
  RunControl control;
  auto report = offsetContours(contours, options, control);
  EXPECT_TRUE(report.ok()) << (report.ok() ? "" : report.error().message);
  return report.ok() ? *report : OffsetReport{};
}

Contour ellipse(double a, double b) {
  Contour c;
  c.closed = true;
  c.segments.push_back({EllipticArc{{0, 0}, {a, 0}, {0, b}, 0.0, 2.0 * kPi}, ""});
  return c;
}

double smallestRadius(const Contour& c) {
  double k = 0.0;
  for (const auto& segment : c.segments) {
    const double a = segment.curve.first(), b = segment.curve.last();
    for (int i = 0; i <= 400; ++i)
      k = std::max(k, std::abs(curve::bend(segment.curve.jet(a + (b - a) * i / 400)).k));
  }
  return 1.0 / k;
}

// Steiner: outward L + 2 pi d, A + L d + pi d^2, curvature k / (1 + d k). Ellipse 50 x 30: perimeter by
// DLMF 19.30(i).
TEST(OffsetOfAnEllipse, KeepsSteinersFormulas) {
  struct Row {
    double d, length, area;
  };
  for (const Row& row :
       {Row{5, 286.685915169879, 6067.27873989434}, Row{10, 318.101841705777, 7579.24813208348},
        Row{-10, 192.438135562185, 2473.84835940386}}) {
    const auto report =
        offset({ellipse(50, 30)}, std::abs(row.d), row.d > 0 ? ToolSide::right : ToolSide::left);
    ASSERT_EQ(report.paths.size(), 1u);
    EXPECT_TRUE(report.paths[0].closed);
    EXPECT_NEAR(contour::length(report.paths[0]), row.length, 1e-7);
    EXPECT_NEAR(contour::signedArea(report.paths[0]), row.area, 1e-6);
    EXPECT_NEAR(smallestRadius(report.paths[0]), 18.0 + row.d, 1e-4) << "b^2/a + d";
    EXPECT_TRUE(report.uncut.empty());
  }
}

// Regular only to 18 = b^2 / a; beyond, the tips are trimmed and stay uncut.
TEST(OffsetOfAnEllipse, IsTrimmedBeyondItsSmallestRadius) {
  const auto report = offset({ellipse(50, 30)}, 25.0, ToolSide::left);
  ASSERT_EQ(report.paths.size(), 1u);
  ASSERT_EQ(report.uncut.size(), 2u);
  for (const UncutPlace& place : report.uncut) {
    EXPECT_NEAR(place.radius, 18.0, 0.2);
    EXPECT_NEAR(std::abs(place.point.x), 50.0, 0.5);
  }
  // The trimmed path keeps 25 mm away from the ellipse (dense samples of both).
  const auto ring = test::samples(ellipse(50, 30), 20000);
  for (Vec2 p : test::samples(report.paths[0], 40)) EXPECT_GT(test::distanceToChain(p, ring), 25.0 - 1e-5);
}

// Stadium, 100 straight, r 20: L 325.663706143592, A 5256.63706143592 (Steiner on a segment of 100).
TEST(OffsetOfASegment, GivesTheStadium) {
  Contour there;
  there.closed = true;
  there.segments.push_back({Line{{0, 0}, {100, 0}}, ""});
  there.segments.push_back({Line{{100, 0}, {0, 0}}, ""});
  const auto report = offset({there}, 20.0, ToolSide::right);
  ASSERT_EQ(report.paths.size(), 1u);
  EXPECT_NEAR(contour::length(report.paths[0]), 325.663706143592, 1e-9);
  EXPECT_NEAR(contour::signedArea(report.paths[0]), 5256.63706143592, 1e-8);
}

// Reuleaux triangle of width 50 (Barbier: L = 50 pi; area 1761.92730752614): a curve of constant width plus a
// disk.
TEST(OffsetOfAReuleauxTriangle, AddsItsDisk) {
  Contour c;
  c.closed = true;
  const Vec2 p[3] = {{0, 0}, {50, 0}, {25, 25 * std::sqrt(3.0)}};
  for (int i = 0; i < 3; ++i) {
    const Vec2 centre = p[(i + 2) % 3], from = p[i] - centre;
    c.segments.push_back({Arc{centre, 50, std::atan2(from.y, from.x), kPi / 3}, ""});
  }
  EXPECT_NEAR(contour::signedArea(c), 1761.92730752614, 1e-9);
  const auto report = offset({c}, 4.0, ToolSide::right);
  ASSERT_EQ(report.paths.size(), 1u);
  EXPECT_NEAR(contour::length(report.paths[0]), 58 * kPi, 1e-9);
  EXPECT_NEAR(contour::signedArea(report.paths[0]), 1761.92730752614 + 200 * kPi + 16 * kPi, 1e-8);
}

TEST(OffsetOfARectangle, IsSharpInsideAndRoundOutside) {
  const Contour c = test::polygon({{0, 0}, {40, 0}, {40, 30}, {0, 30}}, true);
  const auto inside = offset({c}, 3.0, ToolSide::left);
  ASSERT_EQ(inside.paths.size(), 1u);
  EXPECT_EQ(inside.paths[0].segments.size(), 4u);
  EXPECT_NEAR(contour::signedArea(inside.paths[0]), 34 * 24, 1e-10);
  ASSERT_EQ(inside.uncut.size(), 4u);
  for (const UncutPlace& place : inside.uncut) {
    EXPECT_EQ(place.radius, 0.0);
    EXPECT_NEAR(place.depth, 3 * (std::sqrt(2.0) - 1), 1e-9);
    ASSERT_TRUE(place.area.has_value());
    EXPECT_NEAR(*place.area, 9 * (1 - kPi / 4), 1e-9);
  }
  const auto outside = offset({c}, 3.0, ToolSide::right);
  ASSERT_EQ(outside.paths.size(), 1u);
  EXPECT_EQ(outside.paths[0].segments.size(), 8u);
  EXPECT_NEAR(contour::length(outside.paths[0]), 140 + 6 * kPi, 1e-10);
  EXPECT_TRUE(outside.uncut.empty());
}

// A concave arc of no more than the tool's radius is never passed over in silence (NISTIR 6556, appendix B).
TEST(Offset, ReportsOrRefusesAConcaveRadiusBelowTheTools) {
  Contour c;  // a slot end of radius 2 in an open line
  c.segments.push_back({Line{{-20, 10}, {-2, 10}}, ""});
  c.segments.push_back({Line{{-2, 10}, {-2, 2}}, ""});
  c.segments.push_back({Arc{{0, 2}, 2, kPi, kPi}, ""});
  c.segments.push_back({Line{{2, 2}, {2, 10}}, ""});
  c.segments.push_back({Line{{2, 10}, {20, 10}}, ""});
  const auto report = offset({c}, 3.0, ToolSide::left);
  ASSERT_EQ(report.paths.size(), 1u);
  EXPECT_FALSE(report.paths[0].closed);
  ASSERT_EQ(report.uncut.size(), 1u);
  EXPECT_NEAR(report.uncut[0].radius, 2.0, 1e-12);
  // The tool rests on both upper corners: its centre is sqrt(9 - 4) above them, the slot's floor 10 below.
  EXPECT_NEAR(report.uncut[0].depth, 10 + std::sqrt(5.0) - 3, 1e-9);
  OffsetOptions options;
  options.radius = 3.0;
  options.uncut = UncutPolicy::refuse;
  RunControl control;
  const auto refused = offsetContours({c}, options, control);
  ASSERT_FALSE(refused.ok());
  EXPECT_EQ(refused.error().code, ErrorCode::infeasible);
  // A tool that fits leaves nothing.
  EXPECT_TRUE(offset({c}, 1.5, ToolSide::left).uncut.empty());
}

TEST(Offset, SplitsAtANarrowNeckAndKeepsClearOfIslands) {
  const Contour bone = test::polygon({{0, 0},
                                      {20, 0},
                                      {20, 8},
                                      {40, 8},
                                      {40, 0},
                                      {60, 0},
                                      {60, 20},
                                      {40, 20},
                                      {40, 12},
                                      {20, 12},
                                      {20, 20},
                                      {0, 20}},
                                     true);
  EXPECT_EQ(offset({bone}, 1.9, ToolSide::left).paths.size(), 1u);
  EXPECT_EQ(offset({bone}, 3.0, ToolSide::left).paths.size(), 2u);
  EXPECT_EQ(offset({bone}, 11.0, ToolSide::left).paths.size(), 0u);
  Contour island;
  island.closed = true;
  island.segments.push_back({Arc{{10, 10}, 2.0, 0.0, -2 * kPi}, ""});
  const auto both = offset({bone, island}, 3.0, ToolSide::left);
  EXPECT_EQ(both.paths.size(), 3u);
  const auto touching = offset({bone, island}, 4.5, ToolSide::left);
  for (const Contour& path : touching.paths) {
    for (Vec2 p : test::samples(path, 50)) EXPECT_GE(curve::distance(p, {10, 10}), 6.5 - 1e-9);
  }
}

TEST(Offset, RefusesWhatItCannotUse) {
  RunControl control;
  OffsetOptions options;
  EXPECT_FALSE(offsetContours({}, options, control).ok());
  EXPECT_FALSE(offsetContours({Contour{}}, options, control).ok());
  options.radius = -1.0;
  EXPECT_FALSE(offsetContours({ellipse(3, 2)}, options, control).ok());
  options.radius = std::numeric_limits<double>::quiet_NaN();
  EXPECT_FALSE(offsetContours({ellipse(3, 2)}, options, control).ok());
  control.cancel();
  options.radius = 1.0;
  EXPECT_EQ(offsetContours({ellipse(3, 2)}, options, control).error().code, ErrorCode::cancelled);
}

}  // namespace
}  // namespace kf::construct
