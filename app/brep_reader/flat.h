// Curves in space, the plane that holds them, and their exact images in it.
// Lengths in mm, angles in rad.
#pragma once

#include <array>
#include <optional>
#include <string>
#include <variant>
#include <vector>

#include "core/base/result.h"
#include "core/curve/curve.h"

namespace kf::brep {

struct Vec3 {
  double x = 0.0, y = 0.0, z = 0.0;
  friend Vec3 operator+(Vec3 a, Vec3 b) { return {a.x + b.x, a.y + b.y, a.z + b.z}; }
  friend Vec3 operator-(Vec3 a, Vec3 b) { return {a.x - b.x, a.y - b.y, a.z - b.z}; }
  friend Vec3 operator*(double f, Vec3 a) { return {f * a.x, f * a.y, f * a.z}; }
};
inline double dot(Vec3 a, Vec3 b) {
  return a.x * b.x + a.y * b.y + a.z * b.z;
}
inline Vec3 cross(Vec3 a, Vec3 b) {
  return {a.y * b.z - a.z * b.y, a.z * b.x - a.x * b.z, a.x * b.y - a.y * b.x};
}
double norm(Vec3 a);

struct SpaceLine {
  Vec3 a, b;
};
// centre + cos(t) u + sin(t) v, t from `start` through `sweep`; a circle when u and v are equally long.
struct SpaceConic {
  Vec3 centre, u, v;
  double start = 0.0, sweep = 1.0;
};
// Clamped; `weights` empty: all one.
struct SpaceSpline {
  int degree = 3;
  std::vector<double> knots;
  std::vector<Vec3> poles;
  std::vector<double> weights;
};
using SpaceCurve = std::variant<SpaceLine, SpaceConic, SpaceSpline>;

// A plane with its own axes: x = (p - origin) . right, y = (p - origin) . up, off the plane by . normal.
struct Plane {
  Vec3 origin, right{1, 0, 0}, up{0, 1, 0}, normal{0, 0, 1};
  double deviation = 0.0;  // largest distance of a curve from it, mm
  std::string text;        // "z = 5 mm", or a point and the normal
};

// A curve may leave the plane by this much, which is far less than any path tolerance and far more than the
// rounding of a file: mm.
inline constexpr double kFlat = 1e-4;

// The plane of all curves. A plane parallel to two axes keeps their coordinates as they are; any other has
// its origin nearest to that of space and its x axis along the projection of the space's x axis.
//
// Domain    at least one curve, all values finite.
// Accuracy  `deviation` is exact for lines and conics and a bound (by the poles) for splines. For curves that
//           are not flat it belongs to the plane through three points far apart, not to the nearest plane.
Plane planeOf(const std::vector<SpaceCurve>& curves);

// The image of the curve in the plane, exact for one that lies in it.
// Fails  invalidArgument  a spline that breaks the rules of makeNurbs; a conic without area or size.
Result<curve::Curve> flattened(const SpaceCurve& curve, const Plane& plane);

}  // namespace kf::brep
