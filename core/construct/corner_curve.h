// One blend between two stretches of curves; internal to construct.
// Lengths in mm, angles in rad.
#pragma once

#include <optional>

#include "core/construct/deviation.h"

namespace kf::construct {

// A joint's two neighbours, measured once.
struct JointPlace {
  const curve::Curve* before = nullptr;
  const curve::Curve* after = nullptr;
  double lengthBefore = 0.0, lengthAfter = 0.0;
  double turn = 0.0;
  bool tangentBreak = false;
};

struct CornerCurve {
  Bezier5 poles;
  double trim = 0.0;       // taken from each neighbour
  double cutBefore = 0.0;  // parameter where the first neighbour is left
  double cutAfter = 0.0;   // parameter where the second is reached
  double deviation = 0.0;  // proved bound
  double largestCurvature = 0.0;
};

// The blend that takes `trim` from each neighbour; empty when it would not be a plain bend (a neighbour turns
// too much on the way, or the curve would nearly stand still).
std::optional<CornerCurve> cornerCurve(const JointPlace& place, double trim);

// The largest blend within the tolerance that takes at most `most` from each neighbour; empty when there is
// none. Cost  about five trial blends.
std::optional<CornerCurve> largestCorner(const JointPlace& place, double tolerance, double most);

}  // namespace kf::construct
