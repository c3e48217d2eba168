// One blend between two stretches of curves.
// Lengths in mm, angles in rad.
#include "core/construct/corner_curve.h"

#include <algorithm>
#include <array>
#include <cmath>
#include <numbers>

#include "core/curve/arc_length.h"

namespace kf::construct {
namespace {

using curve::Bend;
using curve::Curve;
using curve::Side;
using curve::Vec2;

// Places of the second and third pole along the legs, as fractions of the trim, by turn. Found by numerical
// search (Nelder-Mead) for the lowest max sqrt(k'^2 + k^4) times squared deviation on two straight legs; at
// turn 0 the evenly spaced poles that suit a curvature step.
struct Shape {
  double degrees, first, second;
};
constexpr std::array<Shape, 11> kShapes = {{{0.0, 0.400, 0.400},
                                            {5.0, 0.401, 0.452},
                                            {15.0, 0.403, 0.446},
                                            {30.0, 0.406, 0.430},
                                            {60.0, 0.409, 0.377},
                                            {90.0, 0.389, 0.316},
                                            {120.0, 0.327, 0.241},
                                            {135.0, 0.266, 0.211},
                                            {150.0, 0.197, 0.163},
                                            {165.0, 0.109, 0.102},
                                            {180.0, 0.020, 0.020}}};
constexpr double kMostTurnOfNeighbour = 0.7;  // rad, over the stretch that a blend replaces
constexpr int kShapeSamples = 24;

Shape shapeFor(const JointPlace& place) {
  if (!place.tangentBreak) return kShapes.front();
  const double degrees = std::abs(place.turn) * 180.0 / std::numbers::pi;
  std::size_t i = 1;
  while (i + 1 < kShapes.size() && kShapes[i].degrees < degrees) ++i;
  const Shape &a = kShapes[i - 1], &b = kShapes[i];
  const double part = std::clamp((degrees - a.degrees) / (b.degrees - a.degrees), 0.0, 1.0);
  return {degrees, a.first + part * (b.first - a.first), a.second + part * (b.second - a.second)};
}

double parameterBeforeEnd(const Curve& c, double length, double back) {
  if (back >= length) return c.first();
  auto u = curve::parameterAtLength(c, c.first(), length - back);
  return u ? *u : c.last();
}

double parameterAfterStart(const Curve& c, double length, double forth) {
  if (forth >= length) return c.last();
  auto u = curve::parameterAtLength(c, c.first(), forth);
  return u ? *u : c.first();
}

double angleBetween(Vec2 a, Vec2 b) {
  return std::abs(std::atan2(curve::cross(a, b), curve::dot(a, b)));
}

// The three poles at one end. With B' = 5 a T and B'' = 20 (b2 - 2 b1 + b0) the curvature is 0.8 h / a^2,
// where h is how far b2 lies beside the tangent: h = 1.25 k a^2.
void placePoles(Vec2 p, const Bend& bend, double a, double c, double direction, Vec2& b0, Vec2& b1,
                Vec2& b2) {
  b0 = p;
  b1 = p + (direction * a) * bend.tangent;
  b2 = b1 + (direction * c) * bend.tangent + (1.25 * bend.k * a * a) * curve::leftOf(bend.tangent);
}

// False where the curve nearly stops: its curvature would be without bound.
bool measureShape(CornerCurve& corner) {
  double slowest = HUGE_VAL, fastest = 0.0;
  for (int i = 0; i <= kShapeSamples; ++i) {
    const curve::Jet jet = bezierJet(corner.poles, static_cast<double>(i) / kShapeSamples);
    const double speed = curve::norm(jet.d1);
    slowest = std::min(slowest, speed);
    fastest = std::max(fastest, speed);
    corner.largestCurvature = std::max(corner.largestCurvature, std::abs(curve::bend(jet).k));
  }
  return slowest > 1e-3 * fastest;
}

}  // namespace

std::optional<CornerCurve> cornerCurve(const JointPlace& place, double trim) {
  CornerCurve corner;
  corner.trim = trim;
  const Curve &before = *place.before, &after = *place.after;
  corner.cutBefore = parameterBeforeEnd(before, place.lengthBefore, trim);
  corner.cutAfter = parameterAfterStart(after, place.lengthAfter, trim);
  if (!(corner.cutBefore < before.last()) || !(corner.cutAfter > after.first())) return std::nullopt;
  const curve::Jet in = before.jet(corner.cutBefore), out = after.jet(corner.cutAfter, Side::left);
  const Bend bendIn = curve::bend(in), bendOut = curve::bend(out);
  if (!bendIn.regular || !bendOut.regular) return std::nullopt;
  const Bend cornerIn = curve::bend(before.jet(before.last(), Side::left)),
             cornerOut = curve::bend(after.jet(after.first()));
  if (cornerIn.regular && angleBetween(bendIn.tangent, cornerIn.tangent) > kMostTurnOfNeighbour)
    return std::nullopt;
  if (cornerOut.regular && angleBetween(bendOut.tangent, cornerOut.tangent) > kMostTurnOfNeighbour)
    return std::nullopt;
  const Shape shape = shapeFor(place);
  Bezier5& b = corner.poles;
  placePoles(in.p, bendIn, shape.first * trim, shape.second * trim, 1.0, b[0], b[1], b[2]);
  placePoles(out.p, bendOut, shape.first * trim, shape.second * trim, -1.0, b[5], b[4], b[3]);
  if (!measureShape(corner)) return std::nullopt;
  corner.deviation = replacementBound(b, {&before, corner.cutBefore, before.last()},
                                      {&after, after.first(), corner.cutAfter});
  if (!std::isfinite(corner.deviation)) return std::nullopt;
  return corner;
}

// The deviation grows like the trim at a tangent break and like its square at a curvature step: a few secant
// steps on logarithms end within 2 % below the tolerance.
std::optional<CornerCurve> largestCorner(const JointPlace& place, double tolerance, double most) {
  double power = place.tangentBreak ? 1.0 : 2.0;
  const double whole = std::min({most, place.lengthBefore, place.lengthAfter});
  double trim = whole;
  double low = 0.0, high = HUGE_VAL, lastTrim = 0.0, lastDeviation = 0.0;
  std::optional<CornerCurve> best;
  for (int step = 0; step < 40 && trim > 0.0; ++step) {
    const auto corner = cornerCurve(place, trim);
    if (corner && corner->deviation <= tolerance) {
      best = corner;
      low = trim;
      if (high == HUGE_VAL || corner->deviation > 0.98 * tolerance || high - low < 1e-3 * high) break;
    } else {
      high = trim;
      if (best && high - low < 1e-3 * high) break;
    }
    double next = 0.5 * (best ? low + high : high);
    if (corner) {
      if (lastDeviation > 0.0 && corner->deviation != lastDeviation && trim != lastTrim)
        power = std::clamp(std::log(corner->deviation / lastDeviation) / std::log(trim / lastTrim), 0.5, 4.0);
      lastTrim = trim;
      lastDeviation = corner->deviation;
      if (corner->deviation > 0.0) next = trim * std::pow(0.99 * tolerance / corner->deviation, 1.0 / power);
    }
    if (!(next > low) || !(next < high)) next = 0.5 * (low + high);
    trim = next;
    if (trim < 1e-9 * whole) break;
  }
  return best;
}

}  // namespace kf::construct
