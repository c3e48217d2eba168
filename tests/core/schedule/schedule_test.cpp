// The time law: closed forms, both ways of asking, and derivatives that agree with differences.
// mm, s.
#include "core/schedule/schedule.h"

#include <gtest/gtest.h>

#include <algorithm>
#include <cmath>
#include <numeric>
#include <random>

#include "tests/support/random_spline.h"

namespace kf::schedule {
namespace {

using testing::uniform;

std::vector<LimitName> names(std::size_t n) {
  std::vector<LimitName> all(n);
  for (std::size_t i = 0; i < n; ++i) all[i] = static_cast<LimitName>(i % kLimitNameCount);
  return all;
}

// Rest to rest over h with acceleration a up, b down, and speed at most v.
Schedule ramp(double h, double v, double a, double b) {
  const double peak = std::sqrt(2 * h * a * b / (a + b));
  if (peak <= v) {
    const double s = peak * peak / (2 * a);
    return Schedule::constantAcceleration({0, s, h}, {0, peak * peak, 0}, names(3));
  }
  const double up = v * v / (2 * a), down = v * v / (2 * b);
  return Schedule::constantAcceleration({0, up, h - down, h}, {0, v * v, v * v, 0}, names(4));
}

// Closed forms, computed: h/v + v/a, 2 sqrt(h/a), and unequal ramps.
TEST(ConstantAcceleration, TakesTheTimesOfClosedForms) {
  EXPECT_NEAR(ramp(100, 50, 500, 500).time(), 2.1, 1e-14);
  EXPECT_NEAR(ramp(100, 200, 500, 500).time(), 0.9, 1e-14);
  EXPECT_NEAR(ramp(100, 1e9, 500, 500).time(), 0.894427190999916, 1e-14);
  EXPECT_NEAR(ramp(10, 100, 1000, 1000).time(), 0.2, 1e-15);
  const Schedule unequal = ramp(100, 1e9, 2, 4);
  EXPECT_NEAR(unequal.time(), 12.2474487139159, 1e-12);
  EXPECT_NEAR(std::sqrt(*std::max_element(unequal.q().begin(), unequal.q().end())), 16.3299316185545, 1e-12);
}

// One jerk ramp from rest to rest over h with speed (J/2)(T/2)^2 in the middle: each half takes t with
// h/2 = J t^3/6.
TEST(JerkRamps, TakeTheTimeOfTheCube) {
  const double h = 3.0, v = 20.0;
  const Schedule s = Schedule::constantJerkLike({0, h / 2, h}, {0, v * v, 0}, {0, 0}, names(3));
  EXPECT_NEAR(s.time(), 2 * (3 * (h / 2) / v), 1e-14);
  const State start = s.atTime(0), end = s.atTime(s.time());
  EXPECT_EQ(start.v, 0.0);
  EXPECT_EQ(start.a, 0.0);
  EXPECT_EQ(end.v, 0.0);
  EXPECT_EQ(end.s, h);
  const double jerk = 2 * v / std::pow(s.time() / 2, 2);
  EXPECT_NEAR(start.j, jerk, 1e-9 * jerk);
  EXPECT_NEAR(s.atTime(0.1).s, jerk * 1e-3 / 6, 1e-12);
}

// v^2 = 100 + 2 c u + k u^2: sinusoidal and hyperbolic motion in closed form.
TEST(QuadraticCell, RunsAsSineOrHyperbola) {
  // v = 10 cos(w t), u = (10/w) sin(w t): v^2 = 100 - w^2 u^2.
  const double w = 4.0, h = 1.5;
  const Schedule sine = Schedule::constantJerkLike({0, h}, {100, 100 - w * w * h * h}, {0}, names(2));
  EXPECT_NEAR(sine.time(), std::asin(w * h / 10) / w, 1e-14);
  EXPECT_NEAR(sine.atTime(0.1).s, 10 / w * std::sin(0.4), 1e-13);
  EXPECT_NEAR(sine.atTime(0.1).a, -10 * w * std::sin(0.4), 1e-11);
  EXPECT_NEAR(sine.atTime(0.1).j, -10 * w * w * std::cos(0.4), 1e-10);
  const Schedule hyperbola = Schedule::constantJerkLike({0, h}, {100, 100 + w * w * h * h}, {0}, names(2));
  EXPECT_NEAR(hyperbola.time(), std::asinh(w * h / 10) / w, 1e-14);
  EXPECT_NEAR(hyperbola.atTime(0.1).s, 10 / w * std::sinh(0.4), 1e-13);
}

Schedule randomSchedule(std::mt19937_64& random, bool quadratic) {
  std::vector<double> s{0.0}, q, slope;
  const std::size_t n = 2 + random() % 40;
  for (std::size_t i = 0; i < n; ++i) {
    if (i > 0) s.push_back(s.back() + std::exp(uniform(random, -6, 2)));
    const bool rest = (i == 0 || i + 1 == n) && n > 2 && random() % 2 == 0;
    q.push_back(rest ? 0.0 : std::exp(uniform(random, -3, 8)));
  }
  if (!quadratic) return Schedule::constantAcceleration(s, q, names(n));
  for (std::size_t i = 0; i + 1 < n; ++i) {
    // q + c u + k u^2 stays positive when c lies between -2 sqrt(q0 ..): take it near the chord's slope.
    const double h = s[i + 1] - s[i], least = std::min(q[i], q[i + 1]);
    slope.push_back((q[i + 1] - q[i]) / h + uniform(random, -1.5, 1.5) * least / h);
  }
  return Schedule::constantJerkLike(s, q, slope, names(n));
}

TEST(Evaluation, ByTimeAndByLengthAgree) {
  std::mt19937_64 random(21);
  for (int i = 0; i < 500; ++i) {
    SCOPED_TRACE("seed 21, schedule " + std::to_string(i));
    const Schedule s = randomSchedule(random, i % 2 == 1);
    ASSERT_TRUE(std::is_sorted(s.t().begin(), s.t().end()));
    std::size_t byTime = 0, byLength = 0;
    for (int j = 0; j <= 60; ++j) {
      const double t = s.time() * j / 60;
      const State a = s.atTime(t, byTime), again = s.atTime(t);
      EXPECT_EQ(a.s, again.s);
      EXPECT_EQ(a.v, again.v);
      const State b = s.atLength(a.s, byLength);
      // ds = v dt: the time is found as exactly as the speed allows.
      EXPECT_NEAR(b.t, t, 1e-11 * s.time() + 1e-13 * s.length() / std::max(a.v, 1e-3)) << j;
      EXPECT_NEAR(b.v, a.v, 1e-7 * (1 + a.v));
    }
    for (std::size_t node = 0; node < s.size(); ++node) {
      EXPECT_NEAR(s.atLength(s.s()[node]).t, s.t()[node], 1e-12 * s.time());
      EXPECT_NEAR(s.atTime(s.t()[node]).s, s.s()[node], 1e-9 * s.length());
      EXPECT_NEAR(s.atTime(s.t()[node]).v, std::sqrt(s.q()[node]), 1e-6 * (1 + std::sqrt(s.q()[node])));
    }
  }
}

TEST(Evaluation, HasDerivativesThatDifferencesConfirm) {
  std::mt19937_64 random(22);
  for (int i = 0; i < 400; ++i) {
    SCOPED_TRACE("seed 22, schedule " + std::to_string(i));
    const Schedule s = randomSchedule(random, i % 2 == 1);
    for (std::size_t cell = 0; cell + 1 < s.size(); ++cell) {
      const double from = s.t()[cell], width = s.t()[cell + 1] - from;
      const double t = from + width * uniform(random, 0.1, 0.9), h = 0.01 * width;
      const State m = s.atTime(t - h), c = s.atTime(t), p = s.atTime(t + h);
      EXPECT_NEAR((p.s - m.s) / (2 * h), c.v, 1e-3 * (c.v + std::abs(c.a) * width) + 1e-6);
      EXPECT_NEAR((p.v - m.v) / (2 * h), c.a, 1e-3 * (std::abs(c.a) + c.v / width) + 1e-6);
      EXPECT_NEAR((p.a - m.a) / (2 * h), c.j,
                  1e-3 * (std::abs(c.j) + std::abs(c.a) / width + c.v / width / width));
    }
  }
}

TEST(TimeByLimit, SumsToTheTime) {
  std::mt19937_64 random(23);
  for (int i = 0; i < 100; ++i) {
    const Schedule s = randomSchedule(random, i % 2 == 1);
    const std::vector<double> parts = s.timeByLimit();
    ASSERT_EQ(parts.size(), kLimitNameCount);
    EXPECT_NEAR(std::accumulate(parts.begin(), parts.end(), 0.0), s.time(), 1e-12 * s.time());
    for (double part : parts) EXPECT_GE(part, 0.0);
  }
}

TEST(Evaluation, ClampsOutsideTheMotion) {
  const Schedule s = ramp(100, 50, 500, 500);
  EXPECT_EQ(s.atTime(-5).s, 0.0);
  EXPECT_EQ(s.atTime(99).s, 100.0);
  EXPECT_EQ(s.atTime(99).v, 0.0);
  EXPECT_EQ(s.atLength(-5).t, 0.0);
  EXPECT_NEAR(s.atLength(1e9).t, s.time(), 1e-14);
  EXPECT_EQ(s.atTime(99).limitedBy, s.limitedBy().back());
  std::size_t stale = 1000;
  EXPECT_NEAR(s.atTime(1.0, stale).v, 50.0, 1e-12);
  EXPECT_TRUE(Schedule().isEmpty());
  EXPECT_EQ(Schedule().time(), 0.0);
}

// A million equal cells: the sum of their times keeps its digits.
TEST(LongSchedules, AddUpWithoutLoss) {
  const std::size_t n = 1000001;
  std::vector<double> s(n), q(n, 0.01);
  for (std::size_t i = 0; i < n; ++i) s[i] = static_cast<double>(i) * 1e-3;
  const Schedule motion = Schedule::constantAcceleration(s, q, names(n));
  EXPECT_NEAR(motion.time(), 1e4, 1e-10 * 1e4);
}

}  // namespace
}  // namespace kf::schedule
