// Lines and arcs that points truly lie on; internal to construct.
// Lengths in mm, angles in rad.
#pragma once

#include <cstddef>
#include <optional>
#include <vector>

#include "core/curve/curve.h"

namespace kf::construct {

// The points' scatter about a smooth curve: median distance from the cubic through two neighbours on each
// side, scaled to a standard deviation.
double scatterOf(const std::vector<curve::Vec2>& points);

struct RecogniseOptions {
  double scatter = 0.0;    // as scatterOf
  double tolerance = 0.0;  // mm; no point lies farther from a shape
};

// How far a point may lie from a shape that holds it: 4.5 standard deviations within the tolerance.
double mostOff(const RecogniseOptions& options);

// A shape ends at once when points a quarter of its length further on are this many times as far off.
inline constexpr double kAbrupt = 12.0;

// Points first .. last (both included) lie on `shape`, a line or an arc in their order.
struct Recognised {
  std::size_t first = 0, last = 0;
  curve::Curve shape = curve::Line{};
};

// What was found from a point on; when nothing was, how many points the best candidate held.
struct Attempt {
  std::optional<Recognised> found;
  std::size_t held = 0;
};

// The line or arc from `first` on that holds the most points, at least 8 (and, for arcs, 20 degrees).
//
// A shape holds points when none lies farther off than 4.5 standard deviations and the mean offset of each
// eighth of them is within 4 standard errors. It is taken for what it truly is only if it ends at once: a
// quarter of its length further on, the points are twelve times as far off, or there are none. A gentle curve
// fails that. Cost  O(m log m) for m points held.
Attempt recognise(const std::vector<curve::Vec2>& points, std::size_t first, const RecogniseOptions& options);

// The circle through closed `points` (the last equals the first), when they truly lie on one.
std::optional<curve::Arc> recogniseCircle(const std::vector<curve::Vec2>& points,
                                          const RecogniseOptions& options);

}  // namespace kf::construct
