// The point list: its rows, read back as a stranger would.
// mm, s; feed in mm/min.
#include "core/write/point_list.h"

#include <array>
#include <charconv>
#include <cmath>
#include <numbers>
#include <sstream>

#include <gmock/gmock.h>
#include <gtest/gtest.h>

namespace kf::write {
namespace {

using ::testing::HasSubstr;

constexpr double kPi = std::numbers::pi;

struct Row {
  int contour = 0;
  double s = 0, t = 0, x = 0, y = 0, feed = 0, a = 0, j = 0, k = 0;
  std::string limitedBy;
};

std::vector<Row> rowsOf(const std::string& text) {
  std::vector<Row> rows;
  std::istringstream lines(text);
  bool header = false;
  for (std::string line; std::getline(lines, line);) {
    if (line.empty() || line[0] == '#') continue;
    if (!header) {
      EXPECT_EQ(
          line,
          "contour,s_mm,t_s,x_mm,y_mm,feed_mm_per_min,acceleration_mm_per_s2,jerk_mm_per_s3,curvature_per_mm,"
          "limited_by");
      header = true;
      continue;
    }
    std::vector<std::string> cells;
    std::istringstream row(line);
    for (std::string cell; std::getline(row, cell, ',');) cells.push_back(cell);
    EXPECT_EQ(cells.size(), 10U) << line;
    if (cells.size() != 10) continue;
    std::array<double, 9> v{};
    for (std::size_t i = 0; i < 9; ++i) {
      const auto [end, failure] = std::from_chars(cells[i].data(), cells[i].data() + cells[i].size(), v[i]);
      EXPECT_TRUE(failure == std::errc() && *end == '\0') << line;
    }
    rows.push_back({static_cast<int>(v[0]), v[1], v[2], v[3], v[4], v[5], v[6], v[7], v[8], cells[9]});
  }
  return rows;
}

// A circle of radius 20 about (5, -3), driven from rest to rest at constant acceleration up to 80 mm/s.
class CircleAtRest {
 public:
  CircleAtRest() {
    const double length = 2 * kPi * 20, ramp = 80.0 * 80.0 / (2 * 400.0);
    schedule_ =
        schedule::Schedule::constantAcceleration({0, ramp, length - ramp, length}, {0, 6400, 6400, 0},
                                                 {LimitName::tangentialAcceleration, LimitName::feed,
                                                  LimitName::tangentialAcceleration, LimitName::stop});
    contour_.number = 3;
    contour_.name = "circle";
    contour_.closed = true;
    contour_.schedule = &schedule_;
    contour_.at = [](double s) { return pointAt(s); };
  }
  static PathPoint pointAt(double s) { return {5 + 20 * std::cos(s / 20), -3 + 20 * std::sin(s / 20), 0.05}; }
  const PointListContour& contour() const { return contour_; }
  const schedule::Schedule& schedule() const { return schedule_; }

 private:
  schedule::Schedule schedule_;
  PointListContour contour_;
};

std::string textOf(const PointListContour& contour, Sampling sampling, double step) {
  PointListHead head{"a.dxf",        "00ff",  "Bench router", {"path.feed_mm_per_min=4800"},
                     "acceleration", "0.1.0", sampling,       step};
  RunControl control;
  const auto text = pointListText(head, {contour}, control);
  return text ? *text : text.error().message;
}

TEST(PointList, SaysWhereItComesFromAndThatItIsUnproven) {
  const CircleAtRest circle;
  const std::string text = textOf(circle.contour(), Sampling::time, 0.01);
  for (const char* part : {"a.dxf", "00ff", "Bench router", "path.feed_mm_per_min=4800", "0.1.0", "UNPROVEN",
                           "0.01 s", "contour 3: circle, closed"})
    EXPECT_THAT(text, HasSubstr(part));
}

TEST(PointList, RisesStrictlyFromZeroToTheExactEnd) {
  const CircleAtRest circle;
  for (const auto& [sampling, step] : {std::pair{Sampling::time, 0.003}, std::pair{Sampling::length, 0.7},
                                       std::pair{Sampling::chord, 0.01}, std::pair{Sampling::time, 1e9}}) {
    const auto rows = rowsOf(textOf(circle.contour(), sampling, step));
    ASSERT_GE(rows.size(), 2U);
    EXPECT_EQ(rows.front().s, 0.0);
    EXPECT_EQ(rows.front().t, 0.0);
    EXPECT_NEAR(rows.back().s, 2 * kPi * 20, 1e-6);
    EXPECT_NEAR(rows.back().t, circle.schedule().time(), 1e-9);
    for (std::size_t i = 1; i < rows.size(); ++i) {
      ASSERT_GT(rows[i].s, rows[i - 1].s);
      ASSERT_GT(rows[i].t, rows[i - 1].t);
      ASSERT_EQ(rows[i].contour, 3);
    }
  }
}

// The contract: reading back moves no point by more than 1e-6 mm or 1e-9 s.
TEST(PointList, ReadBackMovesNoPoint) {
  const CircleAtRest circle;
  const auto rows = rowsOf(textOf(circle.contour(), Sampling::time, 0.0007));
  for (std::size_t i = 0; i < rows.size(); ++i) {
    const double t = std::min(0.0007 * static_cast<double>(i), circle.schedule().time());
    ASSERT_NEAR(rows[i].t, t, 1e-9);
    const schedule::State state = circle.schedule().atTime(t);
    ASSERT_NEAR(rows[i].s, state.s, 1e-6);
    const PathPoint p = CircleAtRest::pointAt(state.s);
    ASSERT_LE(std::hypot(rows[i].x - p.x, rows[i].y - p.y), 1e-6);
    ASSERT_NEAR(rows[i].feed, state.v * 60, 1e-5);
  }
}

// Sagitta of a chord c on a circle: e = R - sqrt(R^2 - c^2/4).
TEST(PointList, ByChordLeavesThePathByNoMoreThanTheStep) {
  const CircleAtRest circle;
  constexpr double kStep = 0.01;
  const auto rows = rowsOf(textOf(circle.contour(), Sampling::chord, kStep));
  double worst = 0.0;
  for (std::size_t i = 1; i < rows.size(); ++i) {
    const double c = std::hypot(rows[i].x - rows[i - 1].x, rows[i].y - rows[i - 1].y);
    worst = std::max(worst, 20 - std::sqrt(400 - c * c / 4));
  }
  EXPECT_LE(worst, kStep);
  EXPECT_GE(worst, 0.8 * kStep) << "rows are needlessly close";
}

TEST(PointList, ByLengthKeepsTheStep) {
  const CircleAtRest circle;
  const auto rows = rowsOf(textOf(circle.contour(), Sampling::length, 0.5));
  for (std::size_t i = 1; i + 1 < rows.size(); ++i) ASSERT_NEAR(rows[i].s - rows[i - 1].s, 0.5, 2e-8);
}

TEST(PointList, RefusesStepsThatMakeNoSense) {
  const CircleAtRest circle;
  for (double step : {0.0, -1.0, std::nan(""), HUGE_VAL}) {
    EXPECT_THAT(textOf(circle.contour(), Sampling::time, step), HasSubstr("positive")) << step;
  }
  EXPECT_THAT(textOf(circle.contour(), Sampling::time, 1e-12), HasSubstr("larger step"));
}

TEST(PointList, StopsWhenCancelled) {
  const CircleAtRest circle;
  RunControl control;
  control.cancel();
  PointListHead head;
  head.step = 1e-6;
  const auto text = pointListText(head, {circle.contour()}, control);
  ASSERT_FALSE(text);
  EXPECT_EQ(text.error().code, ErrorCode::cancelled);
}

TEST(PointList, KeepsAHostileNameInsideItsComment) {
  const CircleAtRest circle;
  PointListHead head;
  head.source = "a\nb\r,c.dxf";
  head.step = 0.1;
  RunControl control;
  const auto text = pointListText(head, {circle.contour()}, control);
  ASSERT_TRUE(text);
  EXPECT_GE(rowsOf(*text).size(), 2U);
  EXPECT_THAT(*text, HasSubstr("# source: a b ,c.dxf"));
}

}  // namespace
}  // namespace kf::write
