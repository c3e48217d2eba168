// How close a place is to a set of curves; internal to construct.
// Lengths in mm.
#pragma once

#include <vector>

#include "core/construct/box_tree.h"
#include "core/construct/pieces.h"
#include "core/contour/contour.h"

namespace kf::construct {

class Clearance {
 public:
  // Keeps pointers to the curves of `contours`.
  explicit Clearance(const std::vector<contour::Contour>& contours);

  // Whether no curve comes closer to p than `limit`.
  bool isClear(curve::Vec2 p, double limit) const;
  // Distance from p to the nearest curve, looking no farther than `reach`; infinite beyond.
  double distance(curve::Vec2 p, double reach) const;

 private:
  std::vector<Piece> pieces_;
  BoxTree tree_;
};

}  // namespace kf::construct
