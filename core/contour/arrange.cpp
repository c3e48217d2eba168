// Direction, start point, nesting and order of contours.
// Lengths in mm.
#include "core/contour/arrange.h"

#include <algorithm>
#include <cmath>
#include <limits>
#include <numeric>

#include "core/curve/arc_length.h"

namespace kf::contour {
namespace {

using curve::Box;
using curve::Curve;
using curve::Vec2;

// Points along the curve, end excluded, denser until the middle of each chord keeps within `error` of it.
void flatten(const Curve& c, double from, double to, double error, int depth, std::vector<Vec2>& points) {
  const Vec2 a = c.point(from), b = c.point(to);
  const double middle = 0.5 * (from + to);
  const bool fine = curve::distance(c.point(middle), 0.5 * (a + b)) <= error &&
                    curve::distance(c.point(0.75 * from + 0.25 * to), 0.75 * a + 0.25 * b) <= error;
  if (fine || depth == 0) {
    points.push_back(a);
    return;
  }
  flatten(c, from, middle, error, depth - 1, points);
  flatten(c, middle, to, error, depth - 1, points);
}

std::vector<Vec2> outline(const Contour& contour, const Box& box) {
  const double error = 1e-4 * std::hypot(box.width(), box.height());
  std::vector<Vec2> points;
  for (const Segment& segment : contour.segments) {
    const Curve& c = segment.curve;
    if (c.asLine() != nullptr) {
      points.push_back(c.startPoint());
      continue;
    }
    std::vector<double> cuts{c.first()};
    for (double u : c.breaks()) cuts.push_back(u);
    cuts.push_back(c.last());
    // Quarters first: the middle of an S-shaped curve may lie on its chord.
    for (std::size_t i = 0; i + 1 < cuts.size(); ++i) {
      const double width = 0.25 * (cuts[i + 1] - cuts[i]);
      for (int part = 0; part < 4; ++part)
        flatten(c, cuts[i] + part * width, cuts[i] + (part + 1) * width, error, 12, points);
    }
  }
  return points;
}

// Even-odd rule along a ray to the right.
bool holds(const std::vector<Vec2>& ring, Vec2 p) {
  bool inside = false;
  for (std::size_t i = 0, j = ring.size() - 1; i < ring.size(); j = i++) {
    const Vec2 a = ring[j], b = ring[i];
    if ((a.y > p.y) == (b.y > p.y)) continue;
    if (p.x < a.x + (p.y - a.y) / (b.y - a.y) * (b.x - a.x)) inside = !inside;
  }
  return inside;
}

bool contains(const Box& outer, const Box& inner) {
  return outer.low.x <= inner.low.x && outer.low.y <= inner.low.y && outer.high.x >= inner.high.x &&
         outer.high.y >= inner.high.y;
}

// Contours whose inner ones have all been cut.
class Ready {
 public:
  explicit Ready(const std::vector<Nesting>& nesting) : nesting_(nesting), open_(nesting.size(), 0) {
    for (const Nesting& n : nesting) {
      if (n.parent) ++open_[*n.parent];
    }
  }
  bool is(std::size_t i) const { return open_[i] == 0; }
  void cut(std::size_t i) {
    if (nesting_[i].parent) --open_[*nesting_[i].parent];
  }

 private:
  const std::vector<Nesting>& nesting_;
  std::vector<std::size_t> open_;
};

}  // namespace

std::vector<Nesting> nest(const std::vector<Contour>& contours) {
  const std::size_t n = contours.size();
  std::vector<Nesting> nesting(n);
  std::vector<Box> boxes(n);
  std::vector<double> areas(n);
  std::vector<std::size_t> bySize;
  for (std::size_t i = 0; i < n; ++i) {
    boxes[i] = bounds(contours[i]);
    areas[i] = boxes[i].width() * boxes[i].height();
    if (contours[i].closed) bySize.push_back(i);
  }
  // Smallest box first: the first ring that holds a contour is its parent.
  std::sort(bySize.begin(), bySize.end(), [&areas](std::size_t p, std::size_t q) {
    return areas[p] != areas[q] ? areas[p] < areas[q] : p < q;
  });
  std::vector<std::vector<Vec2>> rings(n);
  for (std::size_t i = 0; i < n; ++i) {
    const Vec2 p = contours[i].segments.front().curve.startPoint();
    for (std::size_t k : bySize) {
      if (k == i || areas[k] < areas[i] || !contains(boxes[k], boxes[i])) continue;
      if (areas[k] == areas[i] && k > i)
        continue;  // of two equal ones only the first can be around the other
      if (rings[k].empty()) rings[k] = outline(contours[k], boxes[k]);
      if (!holds(rings[k], p)) continue;
      nesting[i].parent = k;
      break;
    }
  }
  for (std::size_t i = 0; i < n; ++i) {
    for (std::optional<std::size_t> p = nesting[i].parent; p; p = nesting[*p].parent) ++nesting[i].depth;
  }
  return nesting;
}

Contour directed(const Contour& contour, std::size_t depth, CutDirection direction) {
  if (!contour.closed || direction == CutDirection::asDrawn) return contour;
  const bool outline = depth % 2 == 0, climb = direction == CutDirection::climb;
  const bool wantClockwise = outline == climb;
  return (signedArea(contour) < 0.0) == wantClockwise ? contour : reversed(contour);
}

Contour startedAt(const Contour& contour, double s) {
  if (!contour.closed || !(s > 0.0) || !(s < length(contour))) return contour;
  Contour out = contour;
  out.segments.clear();
  std::size_t first = 0;
  double before = 0.0;
  for (; first + 1 < contour.segments.size(); ++first) {
    const double here = curve::totalLength(contour.segments[first].curve);
    if (before + here > s) break;
    before += here;
  }
  const Segment& cut = contour.segments[first];
  const double own = curve::totalLength(cut.curve), rounding = 1e-12 * (own + s);
  const auto u = curve::parameterAtLength(cut.curve, cut.curve.first(), s - before);
  if (!u) return contour;
  const bool atStart = s - before <= rounding || !(*u > cut.curve.first());
  const bool atEnd = own - (s - before) <= rounding || !(*u < cut.curve.last());
  if (!atStart && !atEnd) out.segments.push_back({cut.curve.trimmed(*u, cut.curve.last()), cut.source});
  if (atStart) out.segments.push_back(cut);
  for (std::size_t i = 1; i < contour.segments.size(); ++i)
    out.segments.push_back(contour.segments[(first + i) % contour.segments.size()]);
  if (atEnd && !atStart) out.segments.push_back(cut);
  if (!atStart && !atEnd) out.segments.push_back({cut.curve.trimmed(cut.curve.first(), *u), cut.source});
  return out;
}

Result<std::vector<std::size_t>> cutOrder(const std::vector<Contour>& contours,
                                          const std::vector<Nesting>& nesting, CutOrder order,
                                          RunControl& control) {
  std::vector<std::size_t> sequence(contours.size());
  std::iota(sequence.begin(), sequence.end(), std::size_t{0});
  if (order == CutOrder::asDrawn || nesting.size() != contours.size()) return sequence;
  if (order == CutOrder::innerFirst) {
    std::stable_sort(sequence.begin(), sequence.end(), [&nesting](std::size_t p, std::size_t q) {
      return nesting[p].depth > nesting[q].depth;
    });
    return sequence;
  }
  std::vector<std::size_t> left = std::move(sequence);
  sequence.clear();
  Ready ready(nesting);
  Vec2 at{0.0, 0.0};
  while (!left.empty()) {
    if (control.isCancelled()) return Error{ErrorCode::cancelled, "cancelled"};
    std::size_t best = left.size();
    double nearest = std::numeric_limits<double>::infinity();
    for (std::size_t k = 0; k < left.size(); ++k) {
      if (!ready.is(left[k])) continue;
      const double d = curve::distance(at, contours[left[k]].segments.front().curve.startPoint());
      if (d < nearest || best == left.size()) {
        nearest = d;
        best = k;
      }
    }
    const std::size_t next = left[best];
    left.erase(left.begin() + static_cast<std::ptrdiff_t>(best));
    ready.cut(next);
    sequence.push_back(next);
    const Contour& c = contours[next];
    at = c.closed ? c.segments.front().curve.startPoint() : c.segments.back().curve.endPoint();
  }
  return sequence;
}

}  // namespace kf::contour
