// Arc length of a curve, its inverse, and the closest point.
// Lengths in mm.
#pragma once

#include "core/base/result.h"
#include "core/curve/curve.h"

namespace kf::curve {

struct BoundedLength {
  double length = 0.0;
  double bound = 0.0;  // |length - exact| <= bound, estimated from the two finest rules
};

// Length of `curve` between parameters a and b.
//
// Domain    first() <= a <= b <= last(); a cusp or a repeated knot is allowed.
// Fails     invalidArgument  a or b is not finite or lies outside.
//           notConverged     a span needs more than 60 halvings.
// Accuracy  bound <= tolerance * length (relative), but not below the rounding of the coordinates; a
//           tolerance above 1e-8 counts as 1e-8. Exact for lines and arcs. Tested against closed forms, and
//           on seeded splines against a finer run.
// Cost      O(spans) evaluations for smooth spans; no allocation.
// Source    Gauss-Legendre 10 against its two halves, adaptive; knots are split points.
Result<BoundedLength> arcLength(const Curve& curve, double a, double b, double tolerance = 1e-12);

// Length of the whole curve to 1e-12; 0 when it does not converge.
double totalLength(const Curve& curve);

// Parameter u with length(a, u) = s, by Newton safeguarded with bisection.
//
// Domain    0 <= s <= length(a, last()) (a little beyond is clamped).
// Accuracy  |length(a, u) - s| <= 1e-12 max(s, total) unless the curve has a cusp there.
Result<double> parameterAtLength(const Curve& curve, double a, double s);

struct ClosestPoint {
  double u = 0.0;
  double distance = 0.0;
};
// The point of `curve` nearest to `p`.
// Accuracy  found among the local minima seeded at 8 samples a span and polished by Newton to 1e-12.
ClosestPoint closestPoint(const Curve& curve, Vec2 p);

}  // namespace kf::curve
