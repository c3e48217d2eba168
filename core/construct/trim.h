// The part of raw offset pieces that keeps its distance, in order, chained into paths; internal to construct.
// Lengths in mm.
#pragma once

#include <cstdint>
#include <vector>

#include "core/base/result.h"
#include "core/base/run_control.h"
#include "core/construct/clearance.h"
#include "core/construct/raw_offset.h"

namespace kf::construct {

// A stretch of one raw piece between two crossings.
struct SubPiece {
  std::uint32_t piece = 0;
  double from = 0.0, to = 0.0;
  curve::Vec2 start, end;
  bool kept = false;
};

struct Chain {
  std::vector<std::uint32_t> subPieces;  // indices, in travel order
  bool closed = false;
};

struct Trimmed {
  std::vector<SubPiece> subPieces;  // in travel order of the raw pieces
  std::vector<Chain> chains;
};

// How much closer than the radius a stretch may seem because of rounding and fitted curves.
double closenessSlack(const RawOffset& raw, double radius);

// Cuts all pieces at their crossings, keeps what is no closer than `radius` to the contours, and chains it.
// Fails  cancelled  by `control`.
Result<Trimmed> trim(const RawOffset& raw, const Clearance& contours, double radius, RunControl& control);

}  // namespace kf::construct
