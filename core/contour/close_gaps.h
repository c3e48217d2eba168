// Making neighbouring segments of a contour meet exactly.
// Lengths in mm.
#pragma once

#include "core/contour/contour.h"

namespace kf::contour {

// Both ends of a gap move to its middle. A line keeps its other end; any other curve is turned, scaled and
// moved as a whole (so that an arc stays an arc), by no more than a few gaps. Where that would distort a
// curve, because its ends lie close together against its size, the gap is bridged by a short line instead; a
// full turn is completed.
//
// Domain    a contour as chained: gaps small against the segments.
// Accuracy  afterwards neighbouring ends differ by rounding only.
Contour closeGaps(const Contour& contour);

}  // namespace kf::contour
