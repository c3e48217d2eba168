// Chaining loose curves into contours.
// Lengths in mm.
#include "core/contour/chain.h"

#include <algorithm>
#include <cmath>
#include <cstdint>
#include <limits>
#include <numeric>
#include <tuple>

#include "core/contour/close_gaps.h"
#include "core/curve/arc_length.h"

namespace kf::contour {
namespace {

using curve::Vec2;

constexpr std::size_t kNone = std::numeric_limits<std::size_t>::max();
// In a crowd of ends at one place each end is compared with so many others at most, which keeps the work
// linear.
constexpr std::size_t kMostNeighbours = 16;

// End e belongs to curve e / 2; even ends are starts.
struct End {
  Vec2 point;
  Vec2 outward;  // unit tangent, pointing out of the curve
  std::int64_t cx = 0, cy = 0;
};

struct Pair {
  double distance;
  double grains;  // distance in steps that are told apart
  double bend;    // 0: straight on, 2e9: back on itself; whole numbers
  std::size_t a, b;
};

struct Placed {
  std::int64_t cx, cy;
  std::size_t end;
};

class UnionFind {
 public:
  explicit UnionFind(std::size_t n) : parent_(n) {
    std::iota(parent_.begin(), parent_.end(), std::size_t{0});
  }
  std::size_t find(std::size_t i) {
    while (parent_[i] != i) i = parent_[i] = parent_[parent_[i]];
    return i;
  }
  void join(std::size_t a, std::size_t b) { parent_[find(b)] = find(a); }

 private:
  std::vector<std::size_t> parent_;
};

Vec2 tangentAt(const curve::Curve& c, bool start) {
  const double width = c.last() - c.first();
  for (double step = 0.0; step < 1e-3; step = step == 0.0 ? 1e-9 : 10.0 * step) {
    const double u = start ? c.first() + step * width : c.last() - step * width;
    const curve::Bend b = curve::bend(c.jet(u, start ? curve::Side::right : curve::Side::left));
    if (b.regular) return b.tangent;
  }
  return {};
}

class Chainer {
 public:
  Chainer(const std::vector<LooseCurve>& curves, const ChainOptions& options, RunControl& control)
      : curves_(curves), options_(options), control_(control) {}

  Result<ChainReport> run() {
    if (!std::isfinite(options_.tolerance) || !(options_.tolerance > 0.0)) {
      return Error{ErrorCode::invalidArgument, "the chaining tolerance must be a positive number of mm"};
    }
    if (auto ready = collectEnds(); !ready) return ready.error();
    joinRuns();
    control_.report(0.3);
    if (!findPairs()) return Error{ErrorCode::cancelled, "cancelled"};
    control_.report(0.6);
    joinPairs();
    control_.report(0.7);
    if (!walkAll()) return Error{ErrorCode::cancelled, "cancelled"};
    control_.report(1.0);
    return std::move(report_);
  }

 private:
  // True now and then, when the user has asked to stop.
  bool stopAt(std::size_t i) const { return (i & 4095U) == 0 && control_.isCancelled(); }

  Result<void> collectEnds() {
    const std::size_t n = curves_.size();
    lengths_.resize(n);
    ends_.resize(2 * n);
    usable_.assign(n, true);
    partner_.assign(2 * n, kNone);
    const double cell = options_.tolerance;
    for (std::size_t i = 0; i < n; ++i) {
      if (stopAt(i)) return Error{ErrorCode::cancelled, "cancelled"};
      const curve::Curve& c = curves_[i].curve;
      lengths_[i] = curve::totalLength(c);
      for (std::size_t side = 0; side < 2; ++side) {
        End& end = ends_[2 * i + side];
        end.point = side == 0 ? c.startPoint() : c.endPoint();
        if (!curve::isFinite(end.point) || std::abs(end.point.x / cell) > 1e15 ||
            std::abs(end.point.y / cell) > 1e15) {
          return Error{
              ErrorCode::invalidArgument,
              curves_[i].source + ": a coordinate is not finite or too large for the chaining tolerance"};
        }
        end.outward = side == 0 ? -tangentAt(c, true) : tangentAt(c, false);
        end.cx = static_cast<std::int64_t>(std::floor(end.point.x / cell));
        end.cy = static_cast<std::int64_t>(std::floor(end.point.y / cell));
      }
      if (!(lengths_[i] > 0.0)) {
        usable_[i] = false;
        ++report_.zeroLengthDropped;
      }
    }
    return {};
  }

  void link(std::size_t a, std::size_t b) {
    partner_[a] = b;
    partner_[b] = a;
    report_.largestGap = std::max(report_.largestGap, curve::distance(ends_[a].point, ends_[b].point));
  }

  // Pieces of one entity are joined as they stand in it. A run whose ends meet is closed, a single curve too.
  void joinRuns() {
    const double reach = options_.tolerance;
    const auto near = [&](std::size_t a, std::size_t b) {
      return curve::distance(ends_[a].point, ends_[b].point) <= reach;
    };
    std::size_t first = kNone, last = kNone;
    double length = 0.0;
    const auto finish = [&] {
      if (first != kNone && near(2 * last + 1, 2 * first) && length > 4.0 * reach)
        link(2 * last + 1, 2 * first);
      first = kNone;
    };
    for (std::size_t i = 0; i < curves_.size(); ++i) {
      if (!usable_[i]) continue;
      if (first != kNone && curves_[i].follows && curves_[i].layer == curves_[last].layer &&
          near(2 * last + 1, 2 * i)) {
        link(2 * last + 1, 2 * i);
      } else {
        finish();
        first = i;
        length = 0.0;
      }
      last = i;
      length += lengths_[i];
    }
    finish();
  }

  // Candidates are looked for in an end's own cell and the four that follow it, so that each pair is met
  // once.
  bool findPairs() {
    std::vector<Placed> order;
    for (std::size_t e = 0; e < ends_.size(); ++e) {
      if (usable_[e / 2] && partner_[e] == kNone) order.push_back({ends_[e].cx, ends_[e].cy, e});
    }
    const auto key = [](const Placed& p) { return std::tuple(p.cx, p.cy, p.end); };
    std::sort(order.begin(), order.end(),
              [&key](const Placed& p, const Placed& q) { return key(p) < key(q); });
    const auto cellBegin = [&](std::int64_t cx, std::int64_t cy) {
      return std::lower_bound(order.begin(), order.end(), std::pair(cx, cy),
                              [](const Placed& p, const auto& cell) { return std::pair(p.cx, p.cy) < cell; });
    };
    for (auto at = order.begin(); at != order.end(); ++at) {
      if (stopAt(static_cast<std::size_t>(at - order.begin()))) return false;
      offerFrom(at->end, at + 1, order.end(), at->cx, at->cy);
      offerFrom(at->end, cellBegin(at->cx, at->cy + 1), order.end(), at->cx, at->cy + 1);
      // The three cells of the next column stand together.
      auto beside = cellBegin(at->cx + 1, at->cy - 1);
      for (std::int64_t dy = -1; dy <= 1; ++dy) {
        const bool isBefore = beside != order.end() && beside->cx == at->cx + 1 && beside->cy < at->cy + dy;
        if (isBefore) beside = cellBegin(at->cx + 1, at->cy + dy);
        offerFrom(at->end, beside, order.end(), at->cx + 1, at->cy + dy);
      }
    }
    return true;
  }

  template <class Iterator>
  void offerFrom(std::size_t e, Iterator from, Iterator end, std::int64_t cx, std::int64_t cy) {
    const double grain = 0.01 * options_.tolerance;
    std::size_t seen = 0;
    for (; from != end && from->cx == cx && from->cy == cy && seen < kMostNeighbours; ++from, ++seen) {
      const std::size_t other = from->end;
      if (other / 2 == e / 2) continue;
      if (!options_.acrossLayers && curves_[other / 2].layer != curves_[e / 2].layer) continue;
      const double d = curve::distance(ends_[e].point, ends_[other].point);
      if (d > options_.tolerance) continue;
      const double bend = std::round(1e9 * (1.0 + curve::dot(ends_[e].outward, ends_[other].outward)));
      pairs_.push_back({d, std::floor(d / grain), bend, std::min(e, other), std::max(e, other)});
    }
  }

  void joinPairs() {
    // Distances that differ by less than a hundredth of the tolerance count as equal; then the straighter
    // pair wins. Both are whole numbers here, so that the order is a strict one.
    const auto key = [](const Pair& p) { return std::tuple(p.grains, p.bend, p.a, p.b); };
    std::sort(pairs_.begin(), pairs_.end(), [&key](const Pair& p, const Pair& q) { return key(p) < key(q); });
    UnionFind places(ends_.size());
    for (const Pair& pair : pairs_) {
      places.join(pair.a, pair.b);
      if (partner_[pair.a] != kNone || partner_[pair.b] != kNone) continue;
      link(pair.a, pair.b);
    }
    std::vector<std::size_t> crowd(ends_.size(), 0);
    for (std::size_t e = 0; e < ends_.size(); ++e) {
      if (++crowd[places.find(e)] == 3) ++report_.branchPoints;
    }
  }

  bool walkAll() {
    std::vector<bool> used(curves_.size(), false);
    for (std::size_t i = 0; i < curves_.size(); ++i) {
      if (stopAt(i)) return false;
      if (!usable_[i] || used[i]) continue;
      // Backward to the first curve of an open chain, or around to i again.
      std::size_t entry = 2 * i;
      bool closed = false;
      for (std::size_t before = partner_[entry]; before != kNone; before = partner_[entry]) {
        entry = before ^ 1U;
        if (entry == 2 * i) {
          closed = true;
          break;
        }
      }
      Contour contour;
      contour.closed = closed;
      contour.layer = curves_[i].layer;
      for (std::size_t e = entry;;) {
        const LooseCurve& loose = curves_[e / 2];
        used[e / 2] = true;
        contour.segments.push_back({e % 2 == 0 ? loose.curve : loose.curve.reversed(), loose.source});
        e = partner_[e ^ 1U];
        if (e == kNone || e == entry) break;
      }
      const std::size_t number = report_.contours.size() + 1;
      contour.name = contour.layer.empty() || contour.layer == "0"
                         ? "contour " + std::to_string(number)
                         : contour.layer + " " + std::to_string(number);
      report_.contours.push_back(closeGaps(contour));
    }
    return true;
  }

  const std::vector<LooseCurve>& curves_;
  const ChainOptions& options_;
  RunControl& control_;
  std::vector<End> ends_;
  std::vector<double> lengths_;
  std::vector<bool> usable_;
  std::vector<std::size_t> partner_;
  std::vector<Pair> pairs_;
  ChainReport report_;
};

}  // namespace

Result<ChainReport> chain(const std::vector<LooseCurve>& curves, const ChainOptions& options,
                          RunControl& control) {
  return Chainer(curves, options, control).run();
}

}  // namespace kf::contour
