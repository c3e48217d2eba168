// How close a place is to a set of curves.
// Lengths in mm.
#include "core/construct/clearance.h"

#include <cmath>

namespace kf::construct {
namespace {

std::vector<Piece> piecesOf(const std::vector<contour::Contour>& contours) {
  std::vector<Piece> pieces;
  for (const contour::Contour& contour : contours) {
    for (const contour::Segment& segment : contour.segments) addPieces(segment.curve, 0, pieces);
  }
  return pieces;
}

std::vector<curve::Box> boxesOf(const std::vector<Piece>& pieces) {
  std::vector<curve::Box> boxes;
  boxes.reserve(pieces.size());
  for (const Piece& piece : pieces) boxes.push_back(piece.box);
  return boxes;
}

curve::Box around(curve::Vec2 p, double reach) {
  return {p - curve::Vec2{reach, reach}, p + curve::Vec2{reach, reach}};
}

}  // namespace

Clearance::Clearance(const std::vector<contour::Contour>& contours)
    : pieces_(piecesOf(contours)), tree_(boxesOf(pieces_)) {}

bool Clearance::isClear(curve::Vec2 p, double limit) const {
  return tree_.visit(around(p, limit),
                     [&](std::size_t i) { return !(distanceTo(pieces_[i], p, limit) < limit); });
}

double Clearance::distance(curve::Vec2 p, double reach) const {
  double best = reach;
  bool found = false;
  tree_.visit(around(p, reach), [&](std::size_t i) {
    const double d = distanceTo(pieces_[i], p, best);
    if (d <= best) {
      best = d;
      found = true;
    }
    return true;
  });
  return found ? best : HUGE_VAL;
}

}  // namespace kf::construct
