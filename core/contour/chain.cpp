// Chaining loose curves into contours.
// Lengths in mm.
#include "core/contour/chain.h"

#include <algorithm>
#include <cmath>
#include <cstdint>
#include <limits>
#include <numeric>

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
  double bend;  // 0: straight on, 2: back on itself
  std::size_t a, b;
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
    if (control_.isCancelled()) return Error{ErrorCode::cancelled, "cancelled"};
    findPairs();
    if (control_.isCancelled()) return Error{ErrorCode::cancelled, "cancelled"};
    joinPairs();
    walkAll();
    return std::move(report_);
  }

 private:
  Result<void> collectEnds() {
    const std::size_t n = curves_.size();
    ends_.resize(2 * n);
    usable_.assign(n, true);
    partner_.assign(2 * n, kNone);
    const double cell = options_.tolerance;
    for (std::size_t i = 0; i < n; ++i) {
      const curve::Curve& c = curves_[i].curve;
      const double length = curve::totalLength(c);
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
      if (!(length > 0.0)) {
        usable_[i] = false;
        ++report_.zeroLengthDropped;
      } else if (curve::distance(ends_[2 * i].point, ends_[2 * i + 1].point) <= cell && length > 4.0 * cell) {
        partner_[2 * i] = 2 * i + 1;  // closed by itself
        partner_[2 * i + 1] = 2 * i;
      }
    }
    return {};
  }

  // Candidates are looked for in an end's own cell and the four that follow it, so that each pair is met
  // once.
  void findPairs() {
    std::vector<std::size_t> order;
    for (std::size_t e = 0; e < ends_.size(); ++e) {
      if (usable_[e / 2] && partner_[e] == kNone) order.push_back(e);
    }
    const auto less = [this](std::size_t a, std::size_t b) {
      const End &p = ends_[a], &q = ends_[b];
      if (p.cx != q.cx) return p.cx < q.cx;
      if (p.cy != q.cy) return p.cy < q.cy;
      return a < b;
    };
    std::sort(order.begin(), order.end(), less);
    const auto cellBegin = [&](std::int64_t cx, std::int64_t cy) {
      return std::lower_bound(order.begin(), order.end(), 0, [&](std::size_t e, int) {
        return ends_[e].cx < cx || (ends_[e].cx == cx && ends_[e].cy < cy);
      });
    };
    for (auto at = order.begin(); at != order.end(); ++at) {
      const End& end = ends_[*at];
      offerFrom(*at, at + 1, order.end(), end.cx, end.cy);
      const std::int64_t next[3][2] = {
          {end.cx + 1, end.cy - 1}, {end.cx + 1, end.cy}, {end.cx + 1, end.cy + 1}};
      offerFrom(*at, cellBegin(end.cx, end.cy + 1), order.end(), end.cx, end.cy + 1);
      if (cellBegin(end.cx + 1, end.cy - 1) == order.end()) continue;
      for (const auto& cell : next)
        offerFrom(*at, cellBegin(cell[0], cell[1]), order.end(), cell[0], cell[1]);
    }
  }

  template <class Iterator>
  void offerFrom(std::size_t e, Iterator from, Iterator end, std::int64_t cx, std::int64_t cy) {
    std::size_t seen = 0;
    for (; from != end && ends_[*from].cx == cx && ends_[*from].cy == cy && seen < kMostNeighbours;
         ++from, ++seen) {
      const std::size_t other = *from;
      if (other / 2 == e / 2) continue;
      if (!options_.acrossLayers && curves_[other / 2].layer != curves_[e / 2].layer) continue;
      const double d = curve::distance(ends_[e].point, ends_[other].point);
      if (d > options_.tolerance) continue;
      pairs_.push_back({d, 1.0 + curve::dot(ends_[e].outward, ends_[other].outward), std::min(e, other),
                        std::max(e, other)});
    }
  }

  void joinPairs() {
    // Distances that differ by less than a hundredth of the tolerance count as equal; then the straighter
    // pair wins.
    const double grain = 0.01 * options_.tolerance;
    std::sort(pairs_.begin(), pairs_.end(), [grain](const Pair& p, const Pair& q) {
      const double dp = std::floor(p.distance / grain), dq = std::floor(q.distance / grain);
      if (dp != dq) return dp < dq;
      if (std::abs(p.bend - q.bend) > 1e-9) return p.bend < q.bend;
      return p.a != q.a ? p.a < q.a : p.b < q.b;
    });
    UnionFind places(ends_.size());
    for (const Pair& pair : pairs_) {
      places.join(pair.a, pair.b);
      if (partner_[pair.a] != kNone || partner_[pair.b] != kNone) continue;
      partner_[pair.a] = pair.b;
      partner_[pair.b] = pair.a;
      report_.largestGap = std::max(report_.largestGap, pair.distance);
    }
    std::vector<std::size_t> crowd(ends_.size(), 0);
    for (std::size_t e = 0; e < ends_.size(); ++e) {
      if (++crowd[places.find(e)] == 3) ++report_.branchPoints;
    }
  }

  void walkAll() {
    std::vector<bool> used(curves_.size(), false);
    for (std::size_t i = 0; i < curves_.size(); ++i) {
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
      contour.name = contour.layer.empty() || contour.layer == "0" ? "contour " + std::to_string(number)
                                           : contour.layer + " " + std::to_string(number);
      report_.contours.push_back(closeGaps(contour));
    }
  }

  const std::vector<LooseCurve>& curves_;
  const ChainOptions& options_;
  RunControl& control_;
  std::vector<End> ends_;
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
