// Fitting: noise, corners, lines and arcs that are there, bounds, and refusals.
// Lengths in mm, angles in rad.
#include "core/construct/fit.h"

#include <gtest/gtest.h>

#include <numbers>
#include <random>

#include "core/curve/arc_length.h"
#include "sampled_distance.h"

namespace kf::construct {
namespace {

using contour::Contour;
using curve::Vec2;

constexpr double kPi = std::numbers::pi;

FitReport fitted(const Contour& c, double tolerance) {
  FitOptions options;
  options.tolerance = tolerance;
  RunControl control;
  auto report = fitRuns(c, options, control);
  EXPECT_TRUE(report.ok()) << (report.ok() ? "" : report.error().message);
  return report.ok() ? *report : FitReport{};
}

std::vector<Vec2> noisy(const std::vector<Vec2>& points, double sigma, std::mt19937& random) {
  std::normal_distribution<double> normal(0.0, sigma);
  std::vector<Vec2> out;
  for (Vec2 p : points) out.push_back(p + Vec2{normal(random), normal(random)});
  return out;
}

std::vector<Vec2> along(const auto& f, double from, double to, int count, bool withEnd) {
  std::vector<Vec2> points;
  for (int i = 0; i < count + (withEnd ? 1 : 0); ++i) points.push_back(f(from + (to - from) * i / count));
  return points;
}

// Dense samples of the few fitted segments against the exact polyline, both ways.
double sampledDistance(const FitReport& report, const Contour& polyline) {
  const int dense =
      report.fitted.segments.size() > 100 ? 20 : 1 + 1500 / static_cast<int>(report.fitted.segments.size());
  const auto ours = test::samples(report.fitted, dense), theirs = test::samples(polyline, 1);
  double worst = 0.0;
  for (std::size_t i = 0; i < ours.size(); i += 3)
    worst = std::max(worst, test::distanceToChain(ours[i], theirs));
  for (std::size_t i = 0; i < theirs.size(); i += 4)
    worst = std::max(worst, test::distanceToChain(theirs[i], ours));
  return worst;
}

void expectSmooth(const Contour& c, std::size_t corners) {
  std::size_t breaks = 0;
  for (const contour::Joint& joint : contour::findJoints(c)) {
    EXPECT_LT(joint.gap, 1e-9);
    if (joint.kind == contour::JointKind::tangentBreak) ++breaks;
    EXPECT_NE(joint.kind, contour::JointKind::curvatureStep)
        << "at s " << joint.s << " " << joint.curvatureChange;
  }
  EXPECT_EQ(breaks, corners);
}

TEST(FitOfANoisyCircle, GivesItsCurvatureAlongTheWholeLength) {
  std::mt19937 random(20);
  const double r = 20.0;
  const int count = static_cast<int>(2 * kPi * r / 0.05);
  const auto points = noisy(along(
                                [&](double t) {
                                  return Vec2{r * std::cos(t), r * std::sin(t)};
                                },
                                0, 2 * kPi, count, false),
                            0.001, random);
  const auto report = fitted(test::polygon(points, true), 0.01);
  EXPECT_EQ(report.corners, 0u);
  for (const auto& segment : report.fitted.segments) {
    for (int i = 0; i <= 500; ++i) {
      const double a = segment.curve.first(), b = segment.curve.last();
      EXPECT_NEAR(curve::bend(segment.curve.jet(a + (b - a) * i / 500)).k, 1 / r, 0.01 / r);
    }
  }
  EXPECT_LE(report.largestDeviation, 0.01);
  EXPECT_LE(report.spans + report.arcs, 8u);
}

// The same points as an open run through an ellipse: no arc is there to be found, so splines must carry it.
TEST(FitOfANoisyEllipse, StaysCloseInCurvature) {
  std::mt19937 random(21);
  const double a = 50, b = 30;
  const auto points = noisy(along(
                                [&](double t) {
                                  return Vec2{a * std::cos(t), b * std::sin(t)};
                                },
                                0, 2 * kPi, 4000, false),
                            0.001, random);
  const auto report = fitted(test::polygon(points, true), 0.02);
  EXPECT_EQ(report.arcs + report.lines + report.kept, 0u);
  expectSmooth(report.fitted, 0);
  double worst = 0.0;
  for (const auto& segment : report.fitted.segments) {
    for (int i = 0; i <= 2000; ++i) {
      const double u = segment.curve.first() + (segment.curve.last() - segment.curve.first()) * i / 2000;
      const Vec2 p = segment.curve.point(u);
      const double t = std::atan2(p.y / b, p.x / a);
      const double k =
          a * b / std::pow(a * a * std::pow(std::sin(t), 2) + b * b * std::pow(std::cos(t), 2), 1.5);
      worst = std::max(worst, std::abs(curve::bend(segment.curve.jet(u)).k - k) / k);
    }
  }
  EXPECT_LT(worst, 0.05);
  EXPECT_LE(report.spans, 40u);
}

TEST(FitOfAStadium, FindsItsLinesAndArcs) {
  std::mt19937 random(22);
  std::vector<Vec2> points;
  const auto add = [&](const std::vector<Vec2>& more) {
    points.insert(points.end(), more.begin(), more.end());
  };
  add(along([](double x) { return Vec2{x, -10}; }, -20, 20, 200, false));
  add(along([](double t) { return Vec2{20 + 10 * std::sin(t), -10 * std::cos(t)}; }, 0, kPi, 160, false));
  add(along([](double x) { return Vec2{-x, 10}; }, -20, 20, 200, false));
  add(along([](double t) { return Vec2{-20 - 10 * std::sin(t), 10 * std::cos(t)}; }, 0, kPi, 160, false));
  for (double sigma : {0.0, 0.0005}) {
    const Contour c = test::polygon(noisy(points, sigma, random), true);
    const auto report = fitted(c, 0.01);
    EXPECT_EQ(report.lines, 2u) << sigma;
    EXPECT_EQ(report.arcs, 2u) << sigma;
    EXPECT_EQ(report.splines, 4u) << "one joins each two";
    expectSmooth(report.fitted, 0);
    EXPECT_LE(sampledDistance(report, c), report.largestDeviation + 2e-5);
    for (const auto& segment : report.fitted.segments) {
      if (const curve::Arc* arc = segment.curve.asArc()) {
        EXPECT_NEAR(arc->radius, 10.0, 0.01);
      }
    }
  }
}

TEST(Fit, KeepsCorners) {
  std::mt19937 random(23);
  std::vector<Vec2> points;
  const auto add = [&](const std::vector<Vec2>& more) {
    points.insert(points.end(), more.begin(), more.end());
  };
  // A leaf: two arcs of sines that meet in sharp tips, and a square notch.
  add(along([](double x) { return Vec2{x, -8 * std::sin(kPi * x / 40)}; }, 0, 40, 300, false));
  add(along([](double x) { return Vec2{x, 8 * std::sin(kPi * x / 40)}; }, 40, 22, 150, false));
  add({{22, 8 * std::sin(kPi * 22 / 40) - 3}, {18, 8 * std::sin(kPi * 22 / 40) - 3}});
  add(along([](double x) { return Vec2{x, 8 * std::sin(kPi * x / 40)}; }, 18, 0, 150, false));
  const Contour c = test::polygon(points, true);
  const auto report = fitted(c, 0.01);
  EXPECT_EQ(report.corners, 2u) << "the tips; the notch's long edges are no part of a run";
  expectSmooth(report.fitted, 6);
  EXPECT_LE(sampledDistance(report, c), report.largestDeviation + 2e-5);
  EXPECT_LE(report.largestDeviation, 0.01);
  EXPECT_LE(report.fitted.segments.size(), 12u);
}

TEST(Fit, LeavesPolygonsAndFewPiecesAlone) {
  std::vector<Vec2> octagon = along(
      [](double t) {
        return Vec2{10 * std::cos(t), 10 * std::sin(t)};
      },
      0, 2 * kPi, 8, false);
  const auto report = fitted(test::polygon(octagon, true), 0.01);
  EXPECT_EQ(report.fitted.segments.size(), 8u);
  EXPECT_EQ(report.largestDeviation, 0.0);
  const auto square = fitted(test::polygon({{0, 0}, {1, 0}, {1, 1}, {0, 1}}, true), 0.01);
  EXPECT_TRUE(square.runs.empty());
}

TEST(Fit, ContinuesSmoothlyFromLongNeighbours) {
  // A long line, a run along a clothoid-like bend, and a true arc.
  Contour c;
  c.segments.push_back({curve::Line{{-60, 0}, {0, 0}}, "line"});
  std::vector<Vec2> points = along([](double x) { return Vec2{x, x * x * x / 2400}; }, 0, 20, 400, true);
  for (std::size_t i = 0; i + 1 < points.size(); ++i)
    c.segments.push_back({curve::Line{points[i], points[i + 1]}, ""});
  const auto report = fitted(c, 0.005);
  ASSERT_EQ(report.runs.size(), 1u);
  EXPECT_EQ(report.fitted.segments.front().source, "line");
  EXPECT_LE(report.fitted.segments.size(), 3u);
  expectSmooth(report.fitted, 0);
}

// 200 seeded contours: smooth or with corners, noise up to an eighth of the tolerance, uneven spacing.
TEST(Fit, NeverLeavesTheToleranceOnSeededNoisyContours) {
  std::mt19937 random(200);
  std::uniform_real_distribution<double> uniform(0.0, 1.0);
  std::size_t kept = 0, runs = 0;
  for (int trial = 0; trial < 200; ++trial) {
    const double size = 5 + 40 * uniform(random), tolerance = std::pow(10.0, -3.0 + 1.5 * uniform(random));
    const int waves = 2 + static_cast<int>(random() % 5);
    const bool cornered = trial % 3 == 0;
    const double depth = (cornered ? 0.8 + 0.4 * uniform(random) : 0.25 * uniform(random)) / waves;
    const double phase = 6 * uniform(random);
    // Dense enough for a smooth curve to be within a fifth of the tolerance of the chords.
    const double perWave =
        (1.3 + uniform(random)) * 2 * kPi * size * 1.6 / std::sqrt(1.6 * tolerance * size) / waves;
    const int count = waves * static_cast<int>(perWave + 1.0);
    std::vector<Vec2> points;
    for (int i = 0; i < count; ++i) {
      const bool onCorner = i % (count / waves) == 0;
      const double t = 2 * kPi * (i + (onCorner ? 0.0 : 0.4 * uniform(random))) / count;
      const double wave = cornered ? std::abs(std::sin(0.5 * waves * t)) : std::cos(waves * t + phase);
      const double r = size * (1 + depth * wave);
      points.push_back({r * std::cos(t), r * std::sin(t)});
    }
    const Contour c = test::polygon(noisy(points, 0.125 * tolerance * uniform(random), random), true);
    const auto report = fitted(c, tolerance);
    kept += report.kept;
    runs += report.runs.size();
    EXPECT_LE(report.largestDeviation, tolerance) << "trial " << trial;
    // Chords between 1,500 samples of the result miss it by up to k l^2 / 8, with k up to 3 / size.
    const double chords = 3.0 / size * std::pow(8.0 * size / 1500.0, 2) / 8.0;
    EXPECT_LE(sampledDistance(report, c), report.largestDeviation + chords) << "trial " << trial;
    for (const auto& joint : contour::findJoints(report.fitted))
      EXPECT_LT(joint.gap, 1e-9) << "trial " << trial;
  }
  EXPECT_EQ(runs, 200u);
  EXPECT_LT(kept, 10u);
}

TEST(Fit, RefusesWhatItCannotUse) {
  RunControl control;
  FitOptions options;
  EXPECT_FALSE(fitRuns(Contour{}, options, control).ok());
  options.tolerance = -1;
  EXPECT_FALSE(fitRuns(test::polygon({{0, 0}, {1, 0}}, false), options, control).ok());
  options.tolerance = 0.01;
  options.cornerAngle = 0.0;
  EXPECT_FALSE(fitRuns(test::polygon({{0, 0}, {1, 0}}, false), options, control).ok());
}

}  // namespace
}  // namespace kf::construct
