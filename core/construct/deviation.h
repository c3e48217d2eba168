// How far a replacement strays from what it replaces, with a proof; internal to construct.
// Lengths in mm.
#pragma once

#include <array>
#include <cstddef>

#include "core/curve/curve.h"

namespace kf::construct {

using Bezier5 = std::array<curve::Vec2, 6>;

curve::Vec2 bezierPoint(const Bezier5& b, double t);
// Position and derivatives to the third.
curve::Jet bezierJet(const Bezier5& b, double t);
curve::Curve bezierCurve(const Bezier5& b);

// From p to the segment from a to b.
double distanceToChord(curve::Vec2 p, curve::Vec2 a, curve::Vec2 b);

// A stretch of a curve.
struct CurvePart {
  const curve::Curve* curve = nullptr;
  double from = 0.0, to = 0.0;
};

// How far the stretch can be from its own chord, both ways. Proved: sagitta of an arc; second-derivative
// bound for elliptic arcs; convex hull for splines.
double chordHeight(const CurvePart& part);

// The parameter in [from, to] of a point of the curve near `p`; the nearest one where the curve bends little.
double followClosest(const curve::Curve& curve, double from, double to, curve::Vec2 p);

// Bound on the distance, both ways (Hausdorff), between the blend and `before` followed by `after`, which it
// replaces.
//
// Domain    the blend starts at before.from and ends at after.to.
// Accuracy  proved up to rounding: blend and original are cut into matched pieces; the distance of two pieces
// is
//           at most that of their ends plus the chord heights of both. About 1 % above the true value.
// Cost      `pieces` evaluations and closest points.
double replacementBound(const Bezier5& blend, const CurvePart& before, const CurvePart& after,
                        std::size_t pieces = 24);

}  // namespace kf::construct
