// The path of the tool's centre beside a contour: offset by the tool's radius, inner loops trimmed, nothing
// gouged. Lengths in mm, angles in rad.
#pragma once

#include <cstddef>
#include <optional>
#include <string>
#include <vector>

#include "core/base/result.h"
#include "core/base/run_control.h"
#include "core/contour/contour.h"

namespace kf::construct {

enum class ToolSide { left, right };  // of the direction of travel

// What happens where the tool does not reach the contour.
enum class UncutPolicy {
  trim,    // the tool stays clear; the place is reported
  refuse,  // the contour is refused, naming the first place
};

struct OffsetOptions {
  double radius = 3.0;  // mm, of the tool
  ToolSide side = ToolSide::left;
  UncutPolicy uncut = UncutPolicy::trim;
  double curveTolerance = 1e-8;  // mm, for offsets that are no line or arc
  double leastDepth = 1e-3;      // mm; shallower uncut places are not listed

  Result<void> validate() const;
};

// A stretch of the contour that the tool does not touch: an inner corner, a bend tighter than the tool, a
// narrow gap.
struct UncutPlace {
  std::size_t contour = 0;      // index into the input
  double from = 0.0, to = 0.0;  // arc length on that contour; to < from when it runs over the start
  curve::Vec2 point;            // the deepest point on the contour
  double radius = 0.0;          // smallest radius of the contour there; 0 at a tangent break
  double depth = 0.0;           // how far the tool stays away from `point`
  std::optional<double> area;   // mm^2 left standing; empty where the tool does not pass by in one place
};

struct OffsetReport {
  std::vector<contour::Contour> paths;  // none when the tool fits nowhere
  std::vector<std::size_t> source;      // one a path: the contour its first piece belongs to
  std::vector<UncutPlace> uncut;
  double curveError = 0.0;  // mm, largest error of offset curves, measured at three places a span
};

// Offsets contours that belong together (an outline and its islands): a path keeps clear of all of them.
//
// Domain    segments end where the next begins; gaps are bridged straight.
// Fails     invalidArgument  the radius is not positive and finite; a contour is empty or has a cusp.
//           infeasible       the policy is refuse and a place stays uncut.
//           notConverged     the trimmed path could not be verified (its distance to the contours, and that
//           closed
//                            contours give closed paths).
//           cancelled        by `control`.
// Accuracy  lines and arcs exact; other curves keep their normals, so that k becomes k / (1 - d k) for an
// offset d
//           to the left, within curveTolerance; a path that would be degenerate is widened by up to
//           8e-7 mm. Every stretch of the result is tested to lie no closer to any
//           contour than the radius less 1e-6 mm (sampled). Outer corners are rolled around.
// Cost      O(n log n) for contours whose pieces are not much shorter than the radius; the number of pieces
// within
//           one radius of each other adds to it.
// Source    Lines, arcs and corner arcs as NISTIR 6556, appendix B; trimming by distance after all crossings
// are
//           known.
Result<OffsetReport> offsetContours(const std::vector<contour::Contour>& contours,
                                    const OffsetOptions& options, RunControl& control);

}  // namespace kf::construct
