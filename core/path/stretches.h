// First pass of node placement: smooth stretches with their length and a density of nodes; internal to path.
// Lengths in mm.
#pragma once

#include <cstdint>
#include <optional>
#include <vector>

#include "core/base/result.h"
#include "core/contour/contour.h"
#include "core/path/path.h"

namespace kf::path {

// A piece of one segment between two places that must be nodes (joint, knot, curvature extremum, zero of x'
// or y').
struct Stretch {
  std::uint32_t segment = 0;
  double from = 0.0, to = 0.0;              // parameters
  double start = 0.0, length = 0.0;         // arc length
  BreakKind breakBefore = BreakKind::none;  // what lies between the stretch before and this one
  // Fine samples for placement: parameter, arc length from the stretch's start, integral of |k| and of
  // sqrt|dk/ds|.
  std::vector<double> u, s, turn, swing;
};

struct Stretches {
  std::vector<Stretch> list;
  double length = 0.0, turn = 0.0, swing = 0.0;  // totals
  BreakKind closing = BreakKind::none;
};

// Fails  as buildPath.
Result<Stretches> findStretches(const contour::Contour& contour, const Options& options, RunControl& control);

}  // namespace kf::path
