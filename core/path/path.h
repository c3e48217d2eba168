// The driven path as nodes along arc length, and its exact evaluation between them.
// Lengths in mm, curvature 1/mm, its slope 1/mm^2.
#pragma once

#include <cstddef>
#include <cstdint>
#include <limits>
#include <memory>
#include <vector>

#include "core/base/result.h"
#include "core/base/run_control.h"
#include "core/contour/contour.h"

namespace kf::path {

// Why two neighbouring nodes share one place.
enum class BreakKind : std::uint8_t {
  none,           // an ordinary cell follows
  smooth,         // segments meet with equal tangent and curvature; the slope of the curvature may jump
  curvatureStep,  // the curvature jumps
  tangentBreak,   // the direction jumps
};

struct Options {
  std::size_t targetNodes = 2000;  // about how many; more where every segment needs its own
  double largestStep = 0.0;        // mm; 0: length / 50
  bool gradeAtStops = false;       // nodes thin out geometrically away from rest (needed under a jerk limit)
  double angleTolerance = 1e-4;    // rad; a smaller turn at a joint counts as smooth
  double curvatureTolerance = 1e-6;  // 1/mm, and 1e-4 of the larger curvature
};

struct Sample {
  double x = 0.0, y = 0.0;
  double tx = 1.0, ty = 0.0;  // unit tangent
  double k = 0.0;             // signed curvature
  double dk = 0.0;            // its slope along arc length
};

// Structure of arrays, one entry a node. Where tangent, curvature or its slope jumps there are two nodes at
// the same s: the first carries the values before, the second those after, and breakAfter of the first says
// which kind it is. Invariants: s[0] = 0, s nondecreasing, s.back() = length; s[i] == s[i+1] exactly when
// breakAfter[i] != none; at least one ordinary cell between two breaks.
class Path {
 public:
  bool closed = false;
  double length = 0.0;
  std::vector<double> s, x, y, tx, ty, k, dk;
  std::vector<double> u;               // parameter in the segment's curve
  std::vector<std::uint32_t> segment;  // index into contour().segments
  std::vector<BreakKind> breakAfter;   // size s.size(); the last is the closing joint's kind (none when open)

  std::size_t size() const { return s.size(); }
  const contour::Contour& contour() const { return *contour_; }

  // Exact geometry at arc length `at` (clamped to the path); at a break the later side.
  // Accuracy  position to 1e-10 of the segment's length.  Cost  O(log nodes) and a few curve evaluations.
  Sample sample(double at) const;
  // The same, starting the search at node `hint` and moving it: amortised O(1) for rising `at`.
  Sample sample(double at, std::size_t& hint) const;

 private:
  friend Result<Path> buildPath(const contour::Contour&, const Options&, RunControl&);
  std::shared_ptr<const contour::Contour> contour_;
};

// Places nodes: on every joint and knot, curvature extremum and zero of x' or y', and between them by equal
// shares of a density that grows with curvature and its slope.
//
// Fails     invalidArgument  the contour is empty, has a value that is not finite, or zero length.
//           notConverged     an arc length does not converge (a spline with an inner cusp is named by its
//           source).
// Accuracy  s at nodes to 1e-10 relative.
// Cost      O(nodes + spans).
Result<Path> buildPath(const contour::Contour& contour, const Options& options, RunControl& control);

}  // namespace kf::path
