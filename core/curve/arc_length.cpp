// Arc length, its inverse, and the closest point.
// Lengths in mm.
#include "core/curve/arc_length.h"

#include <algorithm>
#include <cmath>
#include <string>
#include <vector>

#include "core/numeric/gauss_legendre.h"

namespace kf::curve {
namespace {

constexpr int kMaxHalvings = 60;
// A coarser tolerance would be met before the rules resolve the span, and their difference would say nothing.
constexpr double kCoarsest = 1e-8;

struct Piece {
  double a, b, length;
  int depth;
};

// Speed |c'| on one smooth span. Sampling stays strictly inside, so the side does not matter.
double speedAt(const Curve& curve, double u) {
  return norm(curve.jet(u).d1);
}

Result<BoundedLength> smoothLength(const Curve& curve, double a, double b, double tolerance) {
  const auto speed = [&curve](double u) { return speedAt(curve, u); };
  BoundedLength total;
  const double whole = numeric::gauss10(speed, a, b);
  // What rounding of the coordinates alone can make of a piece; halving further would not help.
  const double noise =
      std::max(1e-16 * whole, 2e-16 * (norm(curve.jet(a).p) + norm(curve.jet(b, Side::left).p)));
  std::vector<Piece> open{{a, b, whole, 0}};
  while (!open.empty()) {
    const Piece piece = open.back();
    open.pop_back();
    const double m = 0.5 * (piece.a + piece.b);
    const double left = numeric::gauss10(speed, piece.a, m), right = numeric::gauss10(speed, m, piece.b);
    const double difference = std::abs(left + right - piece.length);
    if (!std::isfinite(difference))
      return Error{ErrorCode::notConverged, "the length of a curve is not finite"};
    // The halves are about 2^20 times more accurate than their difference says, on smooth spans.
    if (difference <= tolerance * (left + right) || difference <= noise || m == piece.a || m == piece.b) {
      total.length += left + right;
      total.bound += difference;
      continue;
    }
    if (piece.depth >= kMaxHalvings) {
      return Error{ErrorCode::notConverged,
                   "the length of a curve does not converge near parameter " + std::to_string(m)};
    }
    open.push_back({m, piece.b, right, piece.depth + 1});
    open.push_back({piece.a, m, left, piece.depth + 1});
  }
  return total;
}

// Calls visit(low, high) for each smooth span of [a, b], in order, until it returns false.
template <class Visit>
void eachSpan(const Curve& curve, double a, double b, const Visit& visit) {
  double low = a;
  if (const Nurbs* n = curve.asNurbs()) {
    for (auto knot = std::upper_bound(n->knots.begin(), n->knots.end(), a);
         knot != n->knots.end() && *knot < b; ++knot) {
      if (*knot <= low) continue;
      if (!visit(low, *knot)) return;
      low = *knot;
    }
  }
  if (low < b) visit(low, b);
}

// Exact length where the speed is constant; negative when it is not.
double constantSpeed(const Curve& curve) {
  if (const Line* line = curve.asLine()) return distance(line->a, line->b);
  if (const Arc* arc = curve.asArc()) return arc->radius * std::abs(arc->sweep);
  return -1.0;
}

// Newton on one smooth span [low, high] of known length, bracketed throughout.
Result<double> invertSpan(const Curve& curve, double low, double high, double target, double length,
                          double scale) {
  double from = low, to = high;
  double u = low + (high - low) * std::clamp(target / length, 0.0, 1.0);
  for (int step = 0; step < 100; ++step) {
    auto so = smoothLength(curve, low, u, 1e-13);
    if (!so) return so.error();
    const double excess = so->length - target;
    if (std::abs(excess) <= 1e-13 * std::max(scale, 1e-300)) break;
    (excess > 0.0 ? to : from) = u;
    const double v = speedAt(curve, u);
    double next = v > 0.0 ? u - excess / v : from;
    if (!(next > from && next < to)) next = 0.5 * (from + to);
    if (next == u) break;
    u = next;
  }
  return u;
}

}  // namespace

Result<BoundedLength> arcLength(const Curve& curve, double a, double b, double tolerance) {
  const double slack = 1e-12 * (curve.last() - curve.first());
  if (!(a <= b) || a < curve.first() - slack || b > curve.last() + slack) {
    return Error{ErrorCode::invalidArgument, "a length was asked for outside the curve: " +
                                                 std::to_string(a) + " to " + std::to_string(b)};
  }
  const double speed = constantSpeed(curve);
  if (speed >= 0.0) return BoundedLength{speed * (b - a), 2e-16 * speed * (b - a)};
  BoundedLength total;
  std::optional<Error> failed;
  eachSpan(curve, a, b, [&](double low, double high) {
    auto part = smoothLength(curve, low, high, std::min(tolerance, kCoarsest));
    if (!part) {
      failed = part.error();
      return false;
    }
    total.length += part->length;
    total.bound += part->bound;
    return true;
  });
  if (failed) return *failed;
  return total;
}

double totalLength(const Curve& curve) {
  const auto all = arcLength(curve, curve.first(), curve.last());
  return all ? all->length : 0.0;
}

Result<double> parameterAtLength(const Curve& curve, double a, double s) {
  if (!(s > 0.0)) return a;
  const double speed = constantSpeed(curve);
  if (speed > 0.0) return std::min(a + s / speed, curve.last());
  double before = 0.0, u = curve.last();
  std::optional<Error> failed;
  eachSpan(curve, a, curve.last(), [&](double low, double high) {
    auto part = smoothLength(curve, low, high, 1e-13);
    if (!part) {
      failed = part.error();
      return false;
    }
    if (before + part->length < s) {
      before += part->length;
      return true;
    }
    auto inside = invertSpan(curve, low, high, s - before, part->length, s);
    if (!inside) {
      failed = inside.error();
      return false;
    }
    u = *inside;
    return false;
  });
  if (failed) return *failed;
  return u;
}

ClosestPoint closestPoint(const Curve& curve, Vec2 p) {
  if (const Line* line = curve.asLine()) {
    const Vec2 d = line->b - line->a;
    const double square = dot(d, d);
    const double u = square > 0.0 ? std::clamp(dot(p - line->a, d) / square, 0.0, 1.0) : 0.0;
    return {u, distance(curve.point(u), p)};
  }
  ClosestPoint best{curve.first(), distance(curve.startPoint(), p)};
  const auto consider = [&](double u) {
    const double d = distance(curve.point(u), p);
    if (d < best.distance) best = {u, d};
  };
  consider(curve.last());
  eachSpan(curve, curve.first(), curve.last(), [&](double low, double high) {
    constexpr int kSeeds = 8;
    for (int i = 0; i <= kSeeds; ++i) {
      const double from = low + (high - low) * std::max(0, i - 1) / kSeeds,
                   to = low + (high - low) * std::min(kSeeds, i + 1) / kSeeds;
      double u = low + (high - low) * i / kSeeds;
      if (distance(curve.point(u), p) > best.distance + norm(curve.jet(u).d1) * (to - from)) continue;
      // Newton on (c - p) . c' = 0, kept between the neighbouring seeds.
      for (int step = 0; step < 50; ++step) {
        const Jet j = curve.jet(u);
        const double g = dot(j.p - p, j.d1), slope = dot(j.d1, j.d1) + dot(j.p - p, j.d2);
        const double next = std::clamp(
            slope > 0.0 ? u - g / slope : u - 0.25 * (to - from) * (g > 0.0 ? 1.0 : -1.0), from, to);
        const bool settled = std::abs(next - u) <= 1e-15 * std::max(std::abs(u), high - low);
        u = next;
        if (settled) break;
      }
      consider(u);
    }
    return true;
  });
  return best;
}

}  // namespace kf::curve
