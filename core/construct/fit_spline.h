// Least-squares splines through points, joined smoothly to what is beside them; internal to construct.
// Lengths in mm.
#pragma once

#include <optional>
#include <vector>

#include "core/curve/curve.h"

namespace kf::construct {

// How a fitted spline begins or ends.
struct EndCondition {
  curve::Vec2 p;        // always kept
  bool smooth = false;  // tangent and curvature are kept as well
  curve::Vec2 tangent;  // unit, in travel direction
  double curvature = 0.0;
};

struct FittedSpline {
  curve::Nurbs spline;     // degree 5, C4 inside
  double deviation = 0.0;  // proved bound on the distance between the spline and the polyline, both ways
  double residual = 0.0;   // root mean square distance of the points
};

// A spline along `points` with as few spans as the tolerance allows; more when that brings the points four
// times closer, for then the data holds more than noise.
//
// `heights[i]`: how far the original is from the chord between points i and i + 1 (one fewer than points).
// Domain    at least 2 points, neighbours distinct.
// Result    empty when the tolerance can't be met.
// Accuracy  deviation is proved up to rounding: points are matched to rising parameters, and between two of
// them the
//           spline stays within its second derivative times the square of the step over 8 of its chord.
// Cost      O(n) a round, about log2(spans) rounds.
std::optional<FittedSpline> fitSpline(const std::vector<curve::Vec2>& points,
                                      const std::vector<double>& heights, const EndCondition& start,
                                      const EndCondition& end, double tolerance);

}  // namespace kf::construct
