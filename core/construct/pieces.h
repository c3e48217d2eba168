// Stretches of curves small enough to be nearly straight, their distance to points and their crossings;
// internal to construct. Lengths in mm.
#pragma once

#include <cstdint>
#include <utility>
#include <vector>

#include "core/curve/curve.h"

namespace kf::construct {

// A stretch of a curve within `height` of its chord. Lines and arcs are one piece each, whatever they span.
struct Piece {
  const curve::Curve* curve = nullptr;
  std::uint32_t owner = 0;  // index of the curve in the caller's list
  double from = 0.0, to = 0.0;
  double height = 0.0;
  curve::Box box;  // holds the stretch
};

// Cuts a curve into pieces that bend little (other curves than lines and arcs: heights below 1 % of the
// chord).
void addPieces(const curve::Curve& curve, std::uint32_t owner, std::vector<Piece>& pieces);

// Distance from p; `enough`: any value is returned once it is certain that the distance exceeds it.
// Accuracy  exact for lines and arcs; for other curves a local minimum to 1e-10 of the piece's size.
double distanceTo(const Piece& piece, curve::Vec2 p, double enough);

// Crossings of two pieces as parameters (on a, on b), ends included within rounding.
// Accuracy  exact formulas for lines and arcs; Newton to 1e-13 elsewhere. Coincident stretches give none.
void crossings(const Piece& a, const Piece& b, std::vector<std::pair<double, double>>& found);

}  // namespace kf::construct
