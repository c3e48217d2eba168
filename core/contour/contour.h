// A contour: curves in order, end to start, as a tool would follow them; and the joints between them.
// Lengths in mm, angles in rad.
#pragma once

#include <cstddef>
#include <string>
#include <string_view>
#include <vector>

#include "core/base/result.h"
#include "core/curve/curve.h"

namespace kf::contour {

// The source of a segment that was put in to blend a joint.
inline constexpr std::string_view kBlendSource = "blend";

// One curve with where it came from (the entity's kind and line in its file), for messages.
struct Segment {
  curve::Curve curve;
  std::string source;
};

// Segments in travel order; each ends where the next begins (within the tolerance that chained them).
// Domain: at least one segment; every segment has positive length.
struct Contour {
  std::string name;   // as shown: "contour 3", or the layer and number
  std::string layer;  // empty when the file has none
  bool closed = false;
  std::vector<Segment> segments;
};

enum class JointKind { smooth, tangentBreak, curvatureStep };

// What happens between segment `before` and the next one.
struct Joint {
  std::size_t before = 0;  // index of the segment that ends here
  double s = 0.0;          // arc length from the start of the contour, mm
  curve::Vec2 point;
  JointKind kind = JointKind::smooth;
  double turn = 0.0;             // change of direction, rad, left positive, -pi..pi
  double curvatureChange = 0.0;  // 1/mm
  double gap = 0.0;              // distance between the two ends, mm
};

struct JointOptions {
  double angleTolerance = 1e-4;      // rad; a smaller turn counts as smooth
  double curvatureTolerance = 1e-6;  // 1/mm; and relative to the larger curvature, 1e-4
};

// All joints, the closing one last (its s is the whole length). Smooth ones too, so that callers can count.
// Inner knots of splines that are not curvature-continuous count as joints: the contour must be split there
// first (see splitAtKnots).
std::vector<Joint> findJoints(const Contour& contour, const JointOptions& options = {});

// The same contour with every spline cut at its inner knots of multiplicity >= degree - 1, where curvature
// may jump, and at its cusps, where the direction turns back.
Contour splitAtKnots(const Contour& contour);

double length(const Contour& contour);
curve::Box bounds(const Contour& contour);
Contour reversed(const Contour& contour);
// Signed area by Green's formula (counter-clockwise positive); 0 for an open contour.
double signedArea(const Contour& contour);

}  // namespace kf::contour
