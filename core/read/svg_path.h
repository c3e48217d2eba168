// Path data and basic shapes of SVG as exact curves; internal to read.
// Lengths in user units, angles in rad, y as in the drawing (downwards).
#pragma once

#include <string_view>
#include <vector>

#include "core/base/result.h"
#include "core/curve/curve.h"

namespace kf::read::svg {

// The curves of a `d` attribute: lines, arcs as arcs, Beziers as splines of degree 2 or 3 (as lines where
// their control points lie on the chord). Pieces without length are left out.
//
// Fails   cannotRead  the data breaks the grammar or a number is not finite; the message has the character.
// Source  SVG 2, chapter 9 "Paths"; SVG 1.1, chapter 8.
Result<std::vector<curve::Curve>> pathCurves(std::string_view data);

// The arc from `from` to `to`: an Arc when the radii are equal, a line when one is 0, nothing (an empty list)
// when the ends coincide. Radii that are too small are scaled up.
// Source  SVG 2, appendix "Implementation notes", B.2.4 and B.2.5 (SVG 1.1: F.6.5, F.6.6).
std::vector<curve::Curve> arcBetween(curve::Vec2 from, curve::Vec2 radii, double rotation, bool large,
                                     bool sweep, curve::Vec2 to);

// Domain: width, height > 0; 0 <= rx <= width / 2, 0 <= ry <= height / 2.
std::vector<curve::Curve> rectangleCurves(double x, double y, double width, double height, double rx,
                                          double ry);
// Domain: rx, ry > 0.
std::vector<curve::Curve> ellipseCurves(double cx, double cy, double rx, double ry);
// Lines from point to point; `closed` adds the one back to the first.
std::vector<curve::Curve> chainOfLines(const std::vector<curve::Vec2>& points, bool closed);

}  // namespace kf::read::svg
