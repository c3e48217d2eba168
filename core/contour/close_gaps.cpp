// Making neighbouring segments of a contour meet exactly.
// Lengths in mm.
#include "core/contour/close_gaps.h"

#include <cmath>
#include <numbers>
#include <optional>
#include <vector>

namespace kf::contour {
namespace {

using curve::Curve;
using curve::Vec2;

// The turn, scale and shift that takes a to a1 and b to b1: z -> a1 + r (z - a), r = (b1 - a1) / (b - a) as
// complex numbers.
curve::Affine2 similarity(Vec2 a, Vec2 b, Vec2 a1, Vec2 b1) {
  const Vec2 d = b - a, e = b1 - a1;
  const double n = curve::dot(d, d);
  const double re = curve::dot(d, e) / n, im = curve::cross(d, e) / n;
  curve::Affine2 map{re, -im, im, re, 0.0, 0.0};
  const Vec2 moved = map.vector(a);
  map.dx = a1.x - moved.x;
  map.dy = a1.y - moved.y;
  return map;
}

// The curve with its ends moved; empty when that would distort it.
std::optional<Curve> withEnds(const Curve& c, Vec2 start, Vec2 end) {
  if (c.asLine() != nullptr) return Curve(curve::Line{start, end});
  const Vec2 a = c.startPoint(), b = c.endPoint();
  const curve::Box box = c.bounds();
  const double size = std::hypot(box.width(), box.height());
  if (curve::distance(a, b) < 0.25 * size || curve::distance(start, end) == 0.0) return std::nullopt;
  return c.transformed(similarity(a, b, start, end));
}

// A single arc that misses a full turn by less than the gap is completed.
std::optional<Curve> completedTurn(const Curve& c) {
  const double turn = 2.0 * std::numbers::pi;
  if (const curve::Arc* arc = c.asArc(); arc != nullptr && std::abs(arc->sweep) > 0.9 * turn) {
    return Curve(curve::Arc{arc->centre, arc->radius, arc->start, std::copysign(turn, arc->sweep)});
  }
  if (const curve::EllipticArc* arc = c.asEllipticArc();
      arc != nullptr && std::abs(arc->sweep) > 0.9 * turn) {
    return Curve(
        curve::EllipticArc{arc->centre, arc->u, arc->v, arc->start, std::copysign(turn, arc->sweep)});
  }
  return std::nullopt;
}

}  // namespace

Contour closeGaps(const Contour& contour) {
  const std::size_t n = contour.segments.size();
  // Where segment i is to start and end.
  std::vector<Vec2> starts(n), ends(n);
  bool gap = false;
  for (std::size_t i = 0; i < n; ++i) {
    starts[i] = contour.segments[i].curve.startPoint();
    ends[i] = contour.segments[i].curve.endPoint();
  }
  for (std::size_t i = 0; i < n; ++i) {
    if (i + 1 == n && !contour.closed) break;
    const std::size_t next = (i + 1) % n;
    if (ends[i] == starts[next]) continue;
    gap = true;
    ends[i] = starts[next] = 0.5 * (ends[i] + starts[next]);
  }
  if (!gap) return contour;
  Contour out = contour;
  out.segments.clear();
  for (std::size_t i = 0; i < n; ++i) {
    const Segment& segment = contour.segments[i];
    const Vec2 a = segment.curve.startPoint(), b = segment.curve.endPoint();
    if (a == starts[i] && b == ends[i]) {
      out.segments.push_back(segment);
      continue;
    }
    if (auto whole = n == 1 ? completedTurn(segment.curve) : std::nullopt) {
      out.segments.push_back({*whole, segment.source});
    } else if (auto moved = withEnds(segment.curve, starts[i], ends[i])) {
      out.segments.push_back({*moved, segment.source});
    } else {
      // Rounding is left alone: a line of that length could only do harm.
      const double rounding = 1e-12 * (std::abs(a.x) + std::abs(a.y) + std::abs(b.x) + std::abs(b.y));
      if (curve::distance(starts[i], a) > rounding)
        out.segments.push_back({Curve(curve::Line{starts[i], a}), "join before " + segment.source});
      out.segments.push_back(segment);
      if (curve::distance(b, ends[i]) > rounding)
        out.segments.push_back({Curve(curve::Line{b, ends[i]}), "join after " + segment.source});
    }
  }
  return out;
}

}  // namespace kf::contour
