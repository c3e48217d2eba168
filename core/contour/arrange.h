// How contours are to be cut: direction, start point, what lies inside what, and the order.
// Lengths in mm.
#pragma once

#include <optional>
#include <vector>

#include "core/base/run_control.h"
#include "core/contour/contour.h"

namespace kf::contour {

// What closed contours lie inside of. Touching or crossing contours count as inside by their start point.
struct Nesting {
  std::optional<std::size_t> parent;  // the smallest closed contour around it
  std::size_t depth = 0;              // 0: an outline (or open and inside nothing), 1: a hole, 2: an island
};

// Accuracy  curves are taken as chords that keep within 1e-4 of the contour's size.
// Cost      O(n log n) boxes, and for each contour the chords of those that might hold it.
std::vector<Nesting> nest(const std::vector<Contour>& contours);

// With a spindle that turns clockwise seen from above, climb milling keeps the material that stays on the
// right: outlines run clockwise, holes counter-clockwise. Source: the sense of cutting speed against feed;
// common practice.
enum class CutDirection { asDrawn, climb, conventional };

// The contour turned round where that is needed; an open one stays. Even depths are outlines, odd ones holes.
Contour directed(const Contour& contour, std::size_t depth, CutDirection direction);

// A closed contour that starts `s` mm further along; a segment is cut where s falls inside it.
// Domain  0 <= s < length(contour), closed; otherwise the contour comes back as it was.
Contour startedAt(const Contour& contour, double s);

enum class CutOrder {
  asDrawn,
  innerFirst,      // what lies inside before what is around it, else as drawn
  shortestTravel,  // inner first, and always to the nearest start from where the last contour ended
};

// Indices of `contours` in the order of cutting; travel begins at the origin.
// Fails  cancelled  by `control`.
// Cost   O(n^2) distances for shortestTravel: 1e8 for 10,000 contours.
Result<std::vector<std::size_t>> cutOrder(const std::vector<Contour>& contours,
                                          const std::vector<Nesting>& nesting, CutOrder order,
                                          RunControl& control);

}  // namespace kf::contour
