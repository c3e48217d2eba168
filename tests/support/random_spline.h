// Seeded random splines: degree, knots (clamped, unclamped, repeated) and weights all vary.
// Lengths in mm.
#pragma once

#include <algorithm>
#include <cmath>
#include <cstddef>
#include <random>
#include <vector>

#include "core/curve/curve.h"

namespace kf::testing {

struct SplineShape {
  int leastDegree = 1, mostDegree = 7;
  double weightRatio = 10.0;  // largest weight over smallest, at most
  bool clampedOnly = false;
  bool simpleKnots = false;  // no repeated inner knot
};

inline double uniform(std::mt19937_64& random, double low, double high) {
  // Written out, so that every standard library gives the same numbers.
  return low + (high - low) * static_cast<double>(random() >> 11) * 0x1p-53;
}

inline curve::Nurbs randomSpline(std::mt19937_64& random, const SplineShape& shape = {}) {
  const auto count = [&random](int low, int high) {
    return low + static_cast<int>(random() % static_cast<std::uint64_t>(high - low + 1));
  };
  const int degree = count(shape.leastDegree, shape.mostDegree);
  const int spans = count(1, 8);
  const bool clamped = shape.clampedOnly || random() % 3 != 0;
  std::vector<double> inner;
  double u = uniform(random, -2.0, 2.0);
  const double first = u;
  for (int i = 1; i < spans; ++i) {
    u += uniform(random, 0.05, 1.0);
    const int repeats = shape.simpleKnots ? 1 : (random() % 4 == 0 ? count(1, degree) : 1);
    inner.insert(inner.end(), static_cast<std::size_t>(repeats), u);
  }
  const double last = u + uniform(random, 0.05, 1.0);
  std::vector<double> knots(static_cast<std::size_t>(degree) + 1, first);
  knots.insert(knots.end(), inner.begin(), inner.end());
  knots.insert(knots.end(), static_cast<std::size_t>(degree) + 1, last);
  if (!clamped) {
    for (int i = degree - 1; i >= 0; --i)
      knots[static_cast<std::size_t>(i)] =
          knots[static_cast<std::size_t>(i) + 1] - uniform(random, 0.05, 0.5);
    for (std::size_t i = knots.size() - static_cast<std::size_t>(degree); i < knots.size(); ++i)
      knots[i] = knots[i - 1] + uniform(random, 0.05, 0.5);
  }
  const std::size_t poles = knots.size() - static_cast<std::size_t>(degree) - 1;
  std::vector<curve::Vec2> points;
  std::vector<double> weights;
  const bool rational = random() % 2 == 0;
  for (std::size_t i = 0; i < poles; ++i) {
    points.push_back(
        {20.0 * static_cast<double>(i) + uniform(random, -15.0, 15.0), uniform(random, -50.0, 50.0)});
    if (rational) weights.push_back(std::exp(uniform(random, 0.0, std::log(shape.weightRatio))));
  }
  return *curve::makeNurbs(degree, knots, points, weights);
}

}  // namespace kf::testing
