// Distances between contours by dense sampling only: an independent check of bounds.
// Lengths in mm.
#pragma once

#include <algorithm>
#include <cmath>
#include <vector>

#include "core/contour/contour.h"

namespace kf::construct::test {

inline std::vector<curve::Vec2> samples(const contour::Contour& c, int perSegment) {
  std::vector<curve::Vec2> points;
  for (const contour::Segment& segment : c.segments) {
    const double a = segment.curve.first(), b = segment.curve.last();
    for (int i = 0; i <= perSegment; ++i) points.push_back(segment.curve.point(a + (b - a) * i / perSegment));
  }
  return points;
}

inline double distanceToChain(curve::Vec2 p, const std::vector<curve::Vec2>& chain) {
  double best = HUGE_VAL;
  for (std::size_t i = 0; i + 1 < chain.size(); ++i) {
    const curve::Vec2 d = chain[i + 1] - chain[i];
    const double square = curve::dot(d, d);
    const double t = square > 0.0 ? std::clamp(curve::dot(p - chain[i], d) / square, 0.0, 1.0) : 0.0;
    best = std::min(best, curve::distance(p, chain[i] + t * d));
  }
  return best;
}

// Largest distance from a sample of `a` to the samples of `b` joined by chords.
inline double oneWay(const contour::Contour& a, const contour::Contour& b, int perSegment) {
  const auto from = samples(a, perSegment), to = samples(b, perSegment);
  double worst = 0.0;
  for (curve::Vec2 p : from) worst = std::max(worst, distanceToChain(p, to));
  return worst;
}

inline double hausdorff(const contour::Contour& a, const contour::Contour& b, int perSegment) {
  return std::max(oneWay(a, b, perSegment), oneWay(b, a, perSegment));
}

inline contour::Contour polygon(const std::vector<curve::Vec2>& corners, bool closed) {
  contour::Contour c;
  c.name = "polygon";
  c.closed = closed;
  const std::size_t n = corners.size();
  for (std::size_t i = 0; i + (closed ? 0 : 1) < n; ++i)
    c.segments.push_back({curve::Line{corners[i], corners[(i + 1) % n]}, ""});
  return c;
}

}  // namespace kf::construct::test
