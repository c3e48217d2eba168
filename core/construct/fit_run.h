// One run of short segments, fitted; internal to construct.
// Lengths in mm, angles in rad.
#pragma once

#include <optional>
#include <vector>

#include "core/construct/fit.h"
#include "core/construct/fit_spline.h"

namespace kf::construct {

// The run as points in travel order. A closed run repeats its first point at the end.
struct RunPoints {
  std::vector<curve::Vec2> points;
  std::vector<double> heights;       // of the original above the chord to the next point
  std::vector<std::size_t> segment;  // which segment begins at this point; npos inside an arc
  bool closed = false;
  std::optional<EndCondition> before;  // the neighbour that it continues smoothly, when there is one
  std::optional<EndCondition> after;
  static constexpr std::size_t npos = static_cast<std::size_t>(-1);
};

// Samples lines and arcs of contour.segments[first], first + 1, ... (count of them, modulo the number of
// segments).
RunPoints samplePieces(const contour::Contour& contour, std::size_t first, std::size_t count,
                       double tolerance);

// Indices of points where the direction turns at once.
std::vector<std::size_t> findCorners(const RunPoints& run, const FitOptions& options);

// Appends the fitted segments to `out` and counts into `report`. A stretch between two corners that can't be
// fitted within the tolerance keeps its segments.
void fitRun(const contour::Contour& contour, const RunPoints& run, const FitOptions& options,
            std::vector<contour::Segment>& out, FitRun& report, std::size_t& corners);

}  // namespace kf::construct
