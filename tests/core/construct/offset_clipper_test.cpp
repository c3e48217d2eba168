// Tool offset against an independent polygon offset (polyclipping, steps of 1e-5 mm) on seeded random
// contours. Lengths in mm, angles in rad.
#include <gtest/gtest.h>

#include <clipper.hpp>
#include <numbers>
#include <random>

#include "core/construct/clearance.h"
#include "core/construct/offset.h"
#include "sampled_distance.h"

namespace kf::construct {
namespace {

using contour::Contour;
using curve::Vec2;

constexpr double kPi = std::numbers::pi;
constexpr double kStep = 1e-5;        // mm, of the polygon offset's integer grid
constexpr double kResolution = 1e-4;  // mm; sharp crossings magnify the grid's rounding about tenfold

// Star-shaped about the origin, so it never crosses itself; smooth through many points, or with corners.
Contour randomContour(std::mt19937& random, bool smooth) {
  std::uniform_real_distribution<double> uniform(0.0, 1.0);
  std::vector<Vec2> points;
  const int n = smooth ? 8 + static_cast<int>(random() % 17) : 3 + static_cast<int>(random() % 20);
  const double size = 5.0 + 15.0 * uniform(random);
  for (int i = 0; i < n; ++i) {
    const double angle = 2.0 * kPi * (i + (smooth ? 0.5 : 0.9) * uniform(random)) / n;
    const double r = size * (smooth ? 0.6 + 0.6 * uniform(random) : 0.3 + 0.9 * uniform(random));
    // On the grid, so that rounding does not move the sharp corners of the other side's input.
    points.push_back(
        {kStep * std::round(r * std::cos(angle) / kStep), kStep * std::round(r * std::sin(angle) / kStep)});
  }
  if (!smooth) return test::polygon(points, true);
  points.push_back(points.front());
  auto spline = curve::interpolateCubic(points);
  EXPECT_TRUE(spline.ok());
  Contour c;
  c.name = "smooth";
  c.closed = true;
  c.segments.push_back({*spline, ""});
  return c;
}

ClipperLib::Path toPath(const std::vector<Vec2>& points) {
  ClipperLib::Path path;
  for (Vec2 p : points)
    path.emplace_back(static_cast<ClipperLib::cInt>(std::llround(p.x / kStep)),
                      static_cast<ClipperLib::cInt>(std::llround(p.y / kStep)));
  return path;
}

std::vector<std::vector<Vec2>> polygonOffset(const Contour& c, double outward, int perSegment) {
  ClipperLib::ClipperOffset engine(2.0, 2.0);
  engine.AddPath(toPath(test::samples(c, perSegment)), ClipperLib::jtRound, ClipperLib::etClosedPolygon);
  ClipperLib::Paths result;
  engine.Execute(result, outward / kStep);
  std::vector<std::vector<Vec2>> loops;
  for (const ClipperLib::Path& path : result) {
    if (std::abs(ClipperLib::Area(path)) * kStep * kStep < 1e-3) continue;
    std::vector<Vec2> loop;
    for (const auto& p : path)
      loop.push_back({static_cast<double>(p.X) * kStep, static_cast<double>(p.Y) * kStep});
    loop.push_back(loop.front());
    loops.push_back(std::move(loop));
  }
  return loops;
}

double areaOf(const std::vector<std::vector<Vec2>>& loops) {
  double twice = 0.0;
  for (const auto& loop : loops) {
    for (std::size_t i = 0; i + 1 < loop.size(); ++i) twice += curve::cross(loop[i], loop[i + 1]);
  }
  return 0.5 * twice;
}

// Largest distance from some points of `from` to the loops of `to`.
double farthest(const std::vector<std::vector<Vec2>>& from, const std::vector<std::vector<Vec2>>& to,
                std::size_t points) {
  double worst = 0.0;
  for (const auto& loop : from) {
    const std::size_t stride = std::max<std::size_t>(1, loop.size() / points);
    for (std::size_t i = 0; i < loop.size(); i += stride) {
      double best = HUGE_VAL;
      for (const auto& other : to) best = std::min(best, test::distanceToChain(loop[i], other));
      worst = std::max(worst, best);
    }
  }
  return worst;
}

// Largest distance from some points of the loops to the exact curves of the paths.
double farthestFromCurves(const std::vector<std::vector<Vec2>>& from, const std::vector<Contour>& paths,
                          std::size_t points) {
  const Clearance near(paths);
  double worst = 0.0;
  for (const auto& loop : from) {
    const std::size_t stride = std::max<std::size_t>(1, loop.size() / points);
    for (std::size_t i = 0; i < loop.size(); i += stride)
      worst = std::max(worst, near.distance(loop[i], 1.0));
  }
  return worst;
}

TEST(OffsetOfRandomContours, AgreesWithAnIndependentPolygonOffset) {
  std::mt19937 random(1000);
  std::uniform_real_distribution<double> uniform(0.0, 1.0);
  for (int trial = 0; trial < 1000; ++trial) {
    const bool smooth = trial % 2 == 0, inside = trial % 4 < 2;
    const Contour c = randomContour(random, smooth);
    const double radius = 0.2 + 4.0 * uniform(random) * uniform(random);
    OffsetOptions options;
    options.radius = radius;
    // The contours run counter-clockwise: their inside is to the left.
    options.side = inside ? ToolSide::left : ToolSide::right;
    RunControl control;
    const auto report = offsetContours({c}, options, control);
    ASSERT_TRUE(report.ok()) << "trial " << trial << ": " << report.error().message;
    std::vector<std::vector<Vec2>> ours;
    for (const Contour& path : report->paths) {
      ASSERT_TRUE(path.closed) << "trial " << trial;
      auto chain = test::samples(path, 40);
      if (std::abs(contour::signedArea(path)) >= 1e-3) ours.push_back(std::move(chain));
    }
    const auto theirs = polygonOffset(c, inside ? -radius : radius, smooth ? 3000 : 1);
    EXPECT_EQ(ours.size(), theirs.size()) << "trial " << trial << " radius " << radius;
    double length = 0.0, area = 0.0;
    for (const Contour& path : report->paths) {
      length += contour::length(path);
      area += contour::signedArea(path);
    }
    EXPECT_NEAR(area, areaOf(theirs), kResolution * length + 2e-3) << "trial " << trial;
    if (ours.empty() || theirs.empty()) continue;
    EXPECT_LT(farthest(ours, theirs, 16), 3.0 * kResolution) << "trial " << trial;
    EXPECT_LT(farthestFromCurves(theirs, report->paths, 200), 3.0 * kResolution) << "trial " << trial;
  }
}

}  // namespace
}  // namespace kf::construct
