// Joints that can be driven at speed: tangent breaks and curvature steps replaced by short curves within a
// tolerance. Lengths in mm, angles in rad, curvature 1/mm.
#pragma once

#include <cstddef>
#include <optional>
#include <string>
#include <vector>

#include "core/base/result.h"
#include "core/base/run_control.h"
#include "core/contour/contour.h"

namespace kf::construct {

enum class Treatment {
  smooth,   // nothing to do
  blended,  // replaced within the tolerance
  stopped,  // kept exactly: the motion stops there, or slows at a curvature step
};

// What the user decided for one joint.
struct JointChoice {
  std::size_t before = 0;           // as in contour::Joint, of the contour cut by contour::splitAtKnots
  bool blend = true;                // false: keep it exactly
  std::optional<double> tolerance;  // mm; empty: the common one
};

struct BlendOptions {
  double tolerance = 0.02;            // mm
  double largestTurn = 2.9670597284;  // 170 degrees; sharper ones double back and are kept
  bool closingJoint =
      false;  // blend where a closed contour begins and ends too; without it the motion rests there
  contour::JointOptions joints;
  std::vector<JointChoice> byHand;

  Result<void> validate() const;
};

struct JointReport {
  contour::Joint joint;  // on the wanted path (before is an index into it, cut by contour::splitAtKnots)
  Treatment treatment = Treatment::smooth;
  double deviation = 0.0;         // mm, bound on the distance between driven and wanted path here, both ways
  double length = 0.0;            // mm, of the blend
  double trim = 0.0;              // mm, taken from each neighbour
  double largestCurvature = 0.0;  // 1/mm, of the blend
  bool crowded = false;           // a short neighbour, not the tolerance, set its size
  std::size_t segment = 0;        // of the blend in the driven contour
};

struct BlendReport {
  contour::Contour driven;
  std::vector<JointReport> joints;  // one a joint, in order
  double largestDeviation = 0.0;
  std::size_t blended = 0, stopped = 0, crowded = 0;
};

// Replaces each tangent break and curvature step by a quintic Bezier curve that joins position, tangent and
// curvature of both neighbours, as large as the tolerance and the neighbours' lengths allow.
//
// Domain    segments end where the next begins.
// Fails     invalidArgument  a tolerance is not positive and finite; a choice names no joint; the contour is
// empty
//                            or a segment has no length.
//           cancelled        by `control`.
// Accuracy  deviation is a proved bound up to rounding (see deviation.h) and never above the joint's
// tolerance.
//           Position, tangent and curvature at the ends of blends agree with the neighbours to rounding.
// Cost      O(n log n) for n segments.
// Source    Shape: poles tuned for the lowest largest |dr/ds^3| at a given deviation, by numerical search for
//           each turn. At 90 degrees its largest curvature times deviation is 0.488 (a clothoid pair: 0.556)
//           and its largest third derivative times deviation squared 0.238 (0.367), so at the same tolerance
//           it is passed 7 % faster where the centripetal limit binds and 16 % faster where jerk does.
Result<BlendReport> blendJoints(const contour::Contour& contour, const BlendOptions& options,
                                RunControl& control);

}  // namespace kf::construct
