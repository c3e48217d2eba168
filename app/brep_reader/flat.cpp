// Finding the plane of curves in space, and projecting into it.
// Lengths in mm, angles in rad.
#include "app/brep_reader/flat.h"

#include <algorithm>
#include <cmath>
#include <numbers>

#include <fmt/format.h>

namespace kf::brep {
namespace {

using curve::Curve;
using curve::Vec2;

// For messages: no "-0".
Vec3 shown(Vec3 v) {
  return {v.x + 0.0, v.y + 0.0, v.z + 0.0};
}

Vec3 conicPoint(const SpaceConic& conic, double t) {
  return conic.centre + std::cos(t) * conic.u + std::sin(t) * conic.v;
}

void addPoints(const SpaceCurve& curve, std::vector<Vec3>& points) {
  if (const auto* line = std::get_if<SpaceLine>(&curve)) {
    points.push_back(line->a);
    points.push_back(line->b);
  } else if (const auto* conic = std::get_if<SpaceConic>(&curve)) {
    for (int i = 0; i <= 8; ++i) points.push_back(conicPoint(*conic, conic->start + conic->sweep * i / 8.0));
  } else {
    const auto& poles = std::get<SpaceSpline>(curve).poles;
    points.insert(points.end(), poles.begin(), poles.end());
  }
}

// Height over the plane along a conic is c + a cos t + b sin t: largest at the ends or where it is
// stationary.
double conicDeviation(const SpaceConic& conic, const Plane& plane) {
  const auto height = [&](double t) {
    return std::abs(dot(conicPoint(conic, t) - plane.origin, plane.normal));
  };
  const double low = std::min(conic.start, conic.start + conic.sweep);
  const double high = std::max(conic.start, conic.start + conic.sweep);
  double worst = std::max(height(low), height(high));
  const double base = std::atan2(dot(conic.v, plane.normal), dot(conic.u, plane.normal));
  const double first = base + std::numbers::pi * std::ceil((low - base) / std::numbers::pi);
  for (int i = 0; i < 3; ++i) {
    const double t = first + i * std::numbers::pi;
    if (t <= high) worst = std::max(worst, height(t));
  }
  return worst;
}

double deviation(const std::vector<SpaceCurve>& curves, const Plane& plane) {
  double worst = 0.0;
  for (const SpaceCurve& curve : curves) {
    if (const auto* conic = std::get_if<SpaceConic>(&curve)) {
      worst = std::max(worst, conicDeviation(*conic, plane));
      continue;
    }
    std::vector<Vec3> points;
    addPoints(curve, points);
    for (const Vec3& p : points) worst = std::max(worst, std::abs(dot(p - plane.origin, plane.normal)));
  }
  return worst;
}

// Through two points far apart, and the point farthest from their line.
Plane throughThree(const std::vector<Vec3>& points) {
  const auto farthestFrom = [&points](Vec3 from) {
    return *std::max_element(points.begin(), points.end(),
                             [from](Vec3 a, Vec3 b) { return norm(a - from) < norm(b - from); });
  };
  const Vec3 a = farthestFrom(points.front()), b = farthestFrom(a), chord = b - a;
  const Vec3 c = *std::max_element(points.begin(), points.end(), [&](Vec3 p, Vec3 q) {
    return norm(cross(chord, p - a)) < norm(cross(chord, q - a));
  });
  Vec3 normal = cross(chord, c - a);
  // On one line: of all planes through it the one that is most level.
  if (!(norm(normal) > 1e-12 * dot(chord, chord))) normal = cross(chord, cross({0, 0, 1}, chord));
  if (!(norm(normal) > 0.0)) normal = {0, 0, 1};
  normal = (1.0 / norm(normal)) * normal;
  const double largest = std::abs(normal.x) > std::max(std::abs(normal.y), std::abs(normal.z)) ? normal.x
                         : std::abs(normal.y) > std::abs(normal.z)                             ? normal.y
                                                                                               : normal.z;
  if (largest < 0.0) normal = -1.0 * normal;
  Plane plane;
  plane.normal = normal;
  plane.origin = dot(a, normal) * normal;
  const Vec3 axis = std::abs(normal.x) > 0.9 ? Vec3{0, 1, 0} : Vec3{1, 0, 0};
  const Vec3 right = axis - dot(axis, normal) * normal;
  plane.right = (1.0 / norm(right)) * right;
  plane.up = cross(normal, plane.right);
  const Vec3 origin = shown(plane.origin), direction = shown(normal);
  plane.text = fmt::format("through ({:.6g}, {:.6g}, {:.6g}) mm with normal ({:.6g}, {:.6g}, {:.6g})",
                           origin.x, origin.y, origin.z, direction.x, direction.y, direction.z);
  return plane;
}

Vec2 image(Vec3 p, const Plane& plane) {
  const Vec3 v = p - plane.origin;
  return {dot(v, plane.right), dot(v, plane.up)};
}
Vec2 direction(Vec3 v, const Plane& plane) {
  return {dot(v, plane.right), dot(v, plane.up)};
}

Result<Curve> conicImage(const SpaceConic& conic, const Plane& plane) {
  const Vec2 u = direction(conic.u, plane), v = direction(conic.v, plane);
  const double area = curve::cross(u, v), a = norm(conic.u), b = norm(conic.v);
  constexpr double kTurn = 2.0 * std::numbers::pi;
  const double sweep = std::clamp(conic.sweep, -kTurn, kTurn);
  if (!(std::abs(area) > 0.0) || sweep == 0.0)
    return Error{ErrorCode::invalidArgument, "a circle or ellipse has no size"};
  const Vec2 centre = image(conic.centre, plane);
  if (a == b) {
    const double side = area < 0.0 ? -1.0 : 1.0;
    return Curve(curve::Arc{centre, a, std::atan2(u.y, u.x) + side * conic.start, side * sweep});
  }
  return Curve(curve::EllipticArc{centre, u, v, conic.start, sweep});
}

}  // namespace

double norm(Vec3 a) {
  return std::hypot(a.x, a.y, a.z);
}

Plane planeOf(const std::vector<SpaceCurve>& curves) {
  std::vector<Vec3> points;
  for (const SpaceCurve& curve : curves) addPoints(curve, points);
  Vec3 low = points.front(), high = low;
  for (const Vec3& p : points) {
    low = {std::min(low.x, p.x), std::min(low.y, p.y), std::min(low.z, p.z)};
    high = {std::max(high.x, p.x), std::max(high.y, p.y), std::max(high.z, p.z)};
  }
  const Vec3 middle = shown(0.5 * (low + high));
  const std::array<Plane, 3> level = {{
      {{0, 0, middle.z}, {1, 0, 0}, {0, 1, 0}, {0, 0, 1}, 0.0, fmt::format("z = {:.6g} mm", middle.z)},
      {{0, middle.y, 0}, {1, 0, 0}, {0, 0, 1}, {0, -1, 0}, 0.0, fmt::format("y = {:.6g} mm", middle.y)},
      {{middle.x, 0, 0}, {0, 1, 0}, {0, 0, 1}, {1, 0, 0}, 0.0, fmt::format("x = {:.6g} mm", middle.x)},
  }};
  for (Plane plane : level) {
    plane.deviation = deviation(curves, plane);
    if (plane.deviation <= kFlat) return plane;
  }
  Plane plane = throughThree(points);
  plane.deviation = deviation(curves, plane);
  return plane;
}

Result<Curve> flattened(const SpaceCurve& curve, const Plane& plane) {
  if (const auto* line = std::get_if<SpaceLine>(&curve))
    return Curve(curve::Line{image(line->a, plane), image(line->b, plane)});
  if (const auto* conic = std::get_if<SpaceConic>(&curve)) return conicImage(*conic, plane);
  const auto& spline = std::get<SpaceSpline>(curve);
  std::vector<Vec2> poles;
  for (const Vec3& p : spline.poles) poles.push_back(image(p, plane));
  auto made = curve::makeNurbs(spline.degree, spline.knots, std::move(poles), spline.weights);
  if (!made) return made.error();
  return Curve(*std::move(made));
}

}  // namespace kf::brep
