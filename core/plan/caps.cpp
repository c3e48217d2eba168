// Caps on speed that follow from limits on speed alone, node by node.
// mm, s.
#include <algorithm>
#include <cmath>

#include "core/plan/cap_formulas.h"
#include "core/plan/plan.h"

namespace kf::plan {
namespace {

constexpr double kNoCap = 1e300;

// Keeps the lowest cap and its name.
struct Lowest {
  double q = kNoCap;
  LimitName name = LimitName::feed;

  void offer(double candidate, LimitName by) {
    if (candidate < q) {
      q = candidate;
      name = by;
    }
  }
  void offerSpeed(double v, LimitName by) { offer(v * v, by); }
};

// Lines and arcs are one block each; the control can't start a new block sooner than one period after the
// last. A blend belongs half to the block before and half to the one after: blocks part where the drawing's
// entities do. A spline is written as many blocks, whose length the chord tolerance sets.
std::vector<double> blockSpeeds(const path::Path& path, double period) {
  const auto& segments = path.contour().segments;
  const std::size_t n = segments.size();
  std::vector<double> lengths(n, 0.0), speeds(n, std::sqrt(kNoCap));
  for (std::size_t i = 0; i + 1 < path.size(); ++i) {
    if (path.segment[i] == path.segment[i + 1]) lengths[path.segment[i]] += path.s[i + 1] - path.s[i];
  }
  const auto isBlend = [&](std::size_t i) { return segments[i].source == contour::kBlendSource; };
  const auto isBlock = [&](std::size_t i) {
    return segments[i].curve.asLine() != nullptr || segments[i].curve.asArc() != nullptr;
  };
  const auto cap = [&](std::size_t i, double length) { speeds[i] = std::min(speeds[i], length / period); };
  const auto half = [&](std::size_t i) { return isBlend(i) ? 0.5 * lengths[i] : 0.0; };
  for (std::size_t i = 0; i < n; ++i) {
    const bool open = !path.closed;
    const std::size_t before = i > 0 ? i - 1 : open ? n : n - 1, after = i + 1 < n ? i + 1 : open ? n : 0;
    if (isBlock(i)) {
      const double length = lengths[i] + (before < n ? half(before) : 0.0) + (after < n ? half(after) : 0.0);
      cap(i, length);
      if (before < n && isBlend(before)) cap(before, length);
      if (after < n && isBlend(after)) cap(after, length);
    } else if (isBlend(i) && after < n && isBlend(after) && after != i) {
      cap(i, half(i) + half(after));  // the entity between was used up
      cap(after, half(i) + half(after));
    }
  }
  return speeds;
}

// What the cut allows, with everything that does not depend on the place worked out once.
class CutCaps {
 public:
  explicit CutCaps(const limits::Limits& limits) : limits_(limits) {
    radius_ = 0.5 * limits.toolDiameter.value_or(0.0);
    // The wall lies right of a path that runs left of the contour: a left turn is then concave.
    concave_ = limits.side == limits::Side::left ? 1.0 : limits.side == limits::Side::right ? -1.0 : 0.0;
    if (limits.teeth && limits.spindleRpm) teethPerSecond_ = *limits.teeth * *limits.spindleRpm / 60.0;
  }

  void offer(double k, Lowest& lowest) const {
    const double kappa = concave_ * k;
    if (limits_.feed) {
      const double factor =
          limits_.feedAtWall && concave_ != 0.0 && radius_ > 0.0 ? wallFeedFactor(kappa, radius_) : 1.0;
      lowest.offerSpeed(*limits_.feed * factor, LimitName::feed);
    }
    if (!(teethPerSecond_ > 0.0)) return;
    if (limits_.feedPerTooth) lowest.offerSpeed(*limits_.feedPerTooth * teethPerSecond_, LimitName::chipLoad);
    if (limits_.chipThickness)
      lowest.offerSpeed(*limits_.chipThickness / thicknessRatio(kappa) * teethPerSecond_,
                        LimitName::chipLoad);
  }

 private:
  // Without a radial depth the tool cuts over its whole width.
  double thicknessRatio(double kappa) const {
    if (!limits_.radialDepth || !(radius_ > 0.0)) return 1.0;
    const double depth = effectiveRadialDepth(*limits_.radialDepth, kappa, radius_);
    return std::max(chipThicknessRatio(depth, 2.0 * radius_), 1e-3);
  }

  const limits::Limits& limits_;
  double radius_ = 0.0, concave_ = 0.0, teethPerSecond_ = 0.0;
};

// What limits on a bend of curvature k (not negative) allow.
void offerBend(Lowest& lowest, const limits::Limits& limits, double k) {
  if (!(k > 0.0)) return;
  if (limits.centripetalAcceleration)
    lowest.offer(*limits.centripetalAcceleration / k, LimitName::centripetal);
  if (limits.chordTolerance && limits.blockPeriod)
    lowest.offerSpeed(chordSpeed(1.0 / k, *limits.chordTolerance, *limits.blockPeriod), LimitName::chord);
  if (limits.positionGain && limits.contourError) {
    const double q = limits.velocityGain
                         ? servoLagQ(k, *limits.contourError, *limits.positionGain, *limits.velocityGain)
                         : servoLagQ(k, *limits.contourError, *limits.positionGain);
    lowest.offer(q, LimitName::contourError);
  }
}

// Curvature at the part u of a cell: cubic Hermite through the values and slopes at its ends, error O(h^4).
double curvatureInside(const path::Path& path, std::size_t i, double u) {
  const double h = path.s[i + 1] - path.s[i], w = 1.0 - u;
  return w * w * (1.0 + 2.0 * u) * path.k[i] + u * u * (3.0 - 2.0 * u) * path.k[i + 1] +
         h * u * w * (w * path.dk[i] - u * path.dk[i + 1]);
}

// Between its nodes q runs straight, and a bend that peaks there would be taken too fast: the larger end
// comes down until the straight line keeps the caps at three inner places; where even the smaller end is too
// large, both do.
void keepInside(const path::Path& path, const limits::Limits& limits, Caps& caps, std::size_t i) {
  constexpr double kEven = 1e-4;  // a curvature that changes less has its ends' caps
  const double larger = std::max(std::abs(path.k[i]), std::abs(path.k[i + 1]));
  const auto bendAt = [&](double u) { return std::abs(curvatureInside(path, i, u)); };
  if (std::abs(path.k[i] - path.k[i + 1]) <= kEven * larger &&
      std::abs(bendAt(0.5) - larger) <= kEven * larger)
    return;
  double& q0 = caps.q[i];
  double& q1 = caps.q[i + 1];
  for (double u : {0.25, 0.5, 0.75}) {
    Lowest inside;
    offerBend(inside, limits, bendAt(u));
    if ((1.0 - u) * q0 + u * q1 <= inside.q) continue;
    const bool first = q0 > q1;
    const double low = std::min(q0, q1), weight = first ? 1.0 - u : u;
    if (inside.q < low) {
      q0 = q1 = inside.q;
      caps.limitedBy[i] = caps.limitedBy[i + 1] = inside.name;
    } else {
      (first ? q0 : q1) = (inside.q - (1.0 - weight) * low) / weight;
      caps.limitedBy[first ? i : i + 1] = inside.name;
    }
  }
}

}  // namespace

Caps speedCaps(const path::Path& path, const limits::Limits& limits) {
  Caps caps;
  const std::size_t n = path.size();
  caps.q.resize(n);
  caps.limitedBy.resize(n);
  std::vector<double> blocks;
  if (limits.blockPeriod) blocks = blockSpeeds(path, *limits.blockPeriod);
  const CutCaps cut(limits);
  for (std::size_t i = 0; i < n; ++i) {
    Lowest lowest;
    const double tx = std::abs(path.tx[i]), ty = std::abs(path.ty[i]), k = std::abs(path.k[i]);
    cut.offer(path.k[i], lowest);
    if (limits.x.speed && tx > 0.0) lowest.offerSpeed(*limits.x.speed / tx, LimitName::axisSpeedX);
    if (limits.y.speed && ty > 0.0) lowest.offerSpeed(*limits.y.speed / ty, LimitName::axisSpeedY);
    if (limits.blockPeriod) lowest.offerSpeed(blocks[path.segment[i]], LimitName::blockPeriod);
    if (limits.blockLength && limits.blockPeriod)
      lowest.offerSpeed(*limits.blockLength / *limits.blockPeriod, LimitName::blockPeriod);
    if (limits.normalJerk)
      lowest.offerSpeed(bendJerkSpeed(k, path.dk[i], *limits.normalJerk), LimitName::normalJerk);
    offerBend(lowest, limits, k);
    caps.q[i] = lowest.q;
    caps.limitedBy[i] = lowest.name;
  }
  for (std::size_t i = 0; i + 1 < n; ++i) {
    if (path.breakAfter[i] == path::BreakKind::none) keepInside(path, limits, caps, i);
  }
  return caps;
}

}  // namespace kf::plan
