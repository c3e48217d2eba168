// Chaining loose curves into contours, whatever their order and direction.
// Lengths in mm.
#pragma once

#include <vector>

#include "core/base/run_control.h"
#include "core/contour/contour.h"

namespace kf::contour {

// One curve as a drawing gives it.
struct LooseCurve {
  curve::Curve curve;
  std::string layer;
  std::string source;  // kind and place in the file
  // It goes on where the curve before it in the list ends (pieces of one polyline): the two are joined before
  // any others are looked at, if their ends lie within the tolerance.
  bool follows = false;
};

struct ChainOptions {
  double tolerance = 0.01;    // mm; ends no farther apart than this are joined, nearest first
  bool acrossLayers = false;  // join curves of different layers
};

struct ChainReport {
  std::vector<Contour> contours;  // in the order in which their first curve stands in the drawing
  std::size_t zeroLengthDropped = 0;
  double largestGap = 0.0;  // mm, over all joined ends
  std::size_t branchPoints =
      0;  // places where more than two ends meet; the straightest continuation is taken
};

// Joins the pieces of one entity first (see follows). Then joins ends that lie within the tolerance: at each
// place the pairs are made nearest first, and at a branch the straightest continuation wins. The first curve
// of a contour keeps its own direction. A curve whose ends meet is a closed contour of its own.
//
// Fails     invalidArgument  tolerance is not positive and finite; a curve has a value that is not finite.
//           cancelled        by `control`.
// Cost      O(n log n): ends are hashed into cells of the tolerance's size.
Result<ChainReport> chain(const std::vector<LooseCurve>& curves, const ChainOptions& options,
                          RunControl& control);

}  // namespace kf::contour
