// Evaluation and cutting of B-splines; internal to curve.
// Lengths in mm; parameters are dimensionless.
#pragma once

#include <array>
#include <cstddef>
#include <vector>

#include "core/curve/curve.h"

namespace kf::curve {

// A pole times its weight, and the weight.
struct Homogeneous {
  double x = 0.0, y = 0.0, w = 1.0;
  Vec2 point() const { return {x / w, y / w}; }
  friend Homogeneous operator+(Homogeneous a, Homogeneous b) { return {a.x + b.x, a.y + b.y, a.w + b.w}; }
  friend Homogeneous operator-(Homogeneous a, Homogeneous b) { return {a.x - b.x, a.y - b.y, a.w - b.w}; }
  friend Homogeneous operator*(double f, Homogeneous a) { return {f * a.x, f * a.y, f * a.w}; }
};

// Index k with knots[k] <= u < knots[k+1] (Side::left: knots[k] < u <= knots[k+1]), kept inside the domain.
std::size_t findSpan(const Nurbs& nurbs, double u, Side side);

Jet nurbsJet(const Nurbs& nurbs, double u, Side side);
Nurbs nurbsReversed(const Nurbs& nurbs);
// The stretch [a, b], clamped at both ends.
Nurbs nurbsTrimmed(const Nurbs& nurbs, double a, double b);
Box nurbsBounds(const Nurbs& nurbs);
std::vector<double> nurbsBreaks(const Nurbs& nurbs);

// The blossom of the polynomial piece on span k, at degree arguments (homogeneous): what its Bezier points
// and the poles of any refinement are made of. `arguments` holds `degree` values.
Homogeneous blossom(const Nurbs& nurbs, std::size_t span, const double* arguments);

}  // namespace kf::curve
