// Offsets piece by piece, before anything is trimmed; internal to construct.
// Lengths in mm, angles in rad.
#pragma once

#include <cstdint>
#include <vector>

#include "core/base/result.h"
#include "core/contour/contour.h"

namespace kf::construct {

// A stretch of the raw offset. Its parameter is that of the segment it comes from (corner arcs: their own).
struct RawPiece {
  curve::Curve curve;
  std::uint32_t contour = 0, segment = 0;
  bool corner = false;  // rolls around the joint after `segment`
};

struct RawOffset {
  std::vector<RawPiece> pieces;  // in travel order
  double error = 0.0;            // of the fitted ones, measured
};

// Tangent and curvature at an end, from just inside where the derivative vanishes.
curve::Bend endBend(const curve::Curve& curve, bool atStart);

// Appends the pieces of one contour, `distance` to the left (negative: right). Stretches that would run
// backwards (bends tighter than the distance, on the inside) are left out: they lie closer than the distance.
// Fails  invalidArgument  a cusp inside a curve.
Result<void> addRawOffset(const contour::Contour& contour, std::uint32_t index, double distance,
                          double tolerance, RawOffset& raw);

}  // namespace kf::construct
