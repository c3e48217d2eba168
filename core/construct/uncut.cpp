// Where the tool does not reach the contour, and what it leaves.
// Lengths in mm.
#include "core/construct/uncut.h"

#include <algorithm>
#include <cmath>

#include "core/curve/arc_length.h"
#include "core/numeric/gauss_legendre.h"

namespace kf::construct {
namespace {

using curve::Curve;
using curve::Vec2;

constexpr int kSamples = 8;

// A stretch of one segment; `before` and `after` are the tool's centres where it leaves and meets the contour
// again.
struct Interval {
  std::size_t segment = 0;
  double from = 0.0, to = 0.0;
  std::optional<Vec2> before, after;
  bool fromStart = false, toEnd = false;  // reaches the ends of its segment
};

using Place = std::vector<Interval>;  // contiguous, in travel order

class UncutSearch {
 public:
  UncutSearch(const contour::Contour& contour, std::size_t index, const Clearance& paths,
              const OffsetOptions& options)
      : contour_(contour), index_(index), paths_(paths), options_(options) {
    side_ = options.side == ToolSide::left ? 1.0 : -1.0;
    for (const contour::Segment& segment : contour.segments)
      starts_.push_back(starts_.empty() ? 0.0 : starts_.back() + lastLength_),
          lastLength_ = curve::totalLength(segment.curve);
  }

  std::vector<UncutPlace> run(const RawOffset& raw, const Trimmed& trimmed) {
    std::vector<UncutPlace> found;
    for (const Place& place : merged(dropped(raw, trimmed))) {
      const UncutPlace made = measure(place);
      if (made.depth > options_.leastDepth) found.push_back(made);
    }
    return found;
  }

 private:
  // What no kept stretch covers, segment by segment.
  std::vector<Interval> dropped(const RawOffset& raw, const Trimmed& trimmed) const {
    std::vector<std::vector<const SubPiece*>> kept(contour_.segments.size());
    for (const SubPiece& sub : trimmed.subPieces) {
      const RawPiece& piece = raw.pieces[sub.piece];
      if (sub.kept && !piece.corner && piece.contour == index_) kept[piece.segment].push_back(&sub);
    }
    std::vector<Interval> list;
    for (std::size_t i = 0; i < kept.size(); ++i) {
      const Curve& c = contour_.segments[i].curve;
      const double slack = 1e-12 * (c.last() - c.first());
      double from = c.first();
      std::optional<Vec2> before;
      for (const SubPiece* sub : kept[i]) {
        if (sub->from > from + slack)
          list.push_back({i, from, sub->from, before, sub->start, from == c.first(), false});
        from = sub->to;
        before = sub->end;
      }
      if (from < c.last() - slack)
        list.push_back({i, from, c.last(), before, std::nullopt, from == c.first(), true});
    }
    return list;
  }

  std::vector<Place> merged(const std::vector<Interval>& list) const {
    std::vector<Place> places;
    for (const Interval& interval : list) {
      const bool joins = !places.empty() && interval.fromStart && places.back().back().toEnd &&
                         places.back().back().segment + 1 == interval.segment;
      if (!joins) places.emplace_back();
      places.back().push_back(interval);
    }
    if (contour_.closed && places.size() > 1 && places.front().front().segment == 0 &&
        places.front().front().fromStart && places.back().back().toEnd &&
        places.back().back().segment + 1 == contour_.segments.size()) {
      places.back().insert(places.back().end(), places.front().begin(), places.front().end());
      places.erase(places.begin());
    }
    return places;
  }

  double lengthAt(std::size_t segment, double u) const {
    const Curve& c = contour_.segments[segment].curve;
    const auto part = curve::arcLength(c, c.first(), u, 1e-9);
    return starts_[segment] + (part ? part->length : 0.0);
  }

  double distanceToPaths(Vec2 p) const {
    for (double reach : {1.5, 6.0, 50.0, 1000.0}) {
      const double d = paths_.distance(p, reach * options_.radius);
      if (std::isfinite(d)) return d;
    }
    return HUGE_VAL;
  }

  UncutPlace measure(const Place& place) const {
    UncutPlace made;
    made.contour = index_;
    made.from = lengthAt(place.front().segment, place.front().from);
    made.to = lengthAt(place.back().segment, place.back().to);
    made.radius = HUGE_VAL;
    made.depth = -HUGE_VAL;
    for (std::size_t j = 0; j < place.size(); ++j) {
      const Interval& interval = place[j];
      const Curve& c = contour_.segments[interval.segment].curve;
      for (int i = 0; i <= kSamples; ++i) {
        const double u = interval.from + (interval.to - interval.from) * i / kSamples;
        const curve::Jet jet = c.jet(u, i == kSamples ? curve::Side::left : curve::Side::right);
        const double hollow = side_ * curve::bend(jet).k;
        if (hollow > 0.0) made.radius = std::min(made.radius, 1.0 / hollow);
        const double depth = distanceToPaths(jet.p) - options_.radius;
        if (depth > made.depth) {
          made.depth = depth;
          made.point = jet.p;
        }
      }
      if (j + 1 < place.size() && isInnerCorner(interval.segment)) made.radius = 0.0;
    }
    made.area = areaOf(place);
    return made;
  }

  bool isInnerCorner(std::size_t segment) const {
    const std::size_t next = (segment + 1) % contour_.segments.size();
    const Vec2 in = endBend(contour_.segments[segment].curve, false).tangent,
               out = endBend(contour_.segments[next].curve, true).tangent;
    return side_ * std::atan2(curve::cross(in, out), curve::dot(in, out)) > 1e-4;
  }

  // Swept about the tool's centre by the contour, less the tool's own sector.
  std::optional<double> areaOf(const Place& place) const {
    const auto &leave = place.front().before, &meet = place.back().after;
    if (!leave || !meet || curve::distance(*leave, *meet) > 1e-5) return std::nullopt;
    const Vec2 centre = *leave;
    double swept = 0.0;
    for (const Interval& interval : place) {
      const Curve& c = contour_.segments[interval.segment].curve;
      constexpr int kParts = 4;
      for (int i = 0; i < kParts; ++i) {
        const double a = interval.from + (interval.to - interval.from) * i / kParts,
                     b = interval.from + (interval.to - interval.from) * (i + 1) / kParts;
        swept += 0.5 * numeric::gauss10(
                           [&](double u) {
                             const curve::Jet jet = c.jet(u);
                             return curve::cross(jet.p - centre, jet.d1);
                           },
                           a, b);
      }
    }
    const Vec2 first = contour_.segments[place.front().segment].curve.point(place.front().from) - centre,
               last = contour_.segments[place.back().segment].curve.point(place.back().to) - centre;
    const double angle = std::atan2(curve::cross(first, last), curve::dot(first, last));
    return std::abs(swept - 0.5 * options_.radius * options_.radius * angle);
  }

  const contour::Contour& contour_;
  std::size_t index_;
  const Clearance& paths_;
  const OffsetOptions& options_;
  double side_ = 1.0;
  std::vector<double> starts_;
  double lastLength_ = 0.0;
};

}  // namespace

std::vector<UncutPlace> uncutPlaces(const contour::Contour& contour, std::size_t index, const RawOffset& raw,
                                    const Trimmed& trimmed, const Clearance& paths,
                                    const OffsetOptions& options) {
  return UncutSearch(contour, index, paths, options).run(raw, trimmed);
}

}  // namespace kf::construct
