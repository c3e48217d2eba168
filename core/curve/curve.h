// Exact plane curves: line, circular arc, elliptic arc, NURBS, and one value type that holds any of them.
// Lengths in mm, angles in rad; parameters are dimensionless.
#pragma once

#include <variant>
#include <vector>

#include "core/base/result.h"
#include "core/curve/vec2.h"

namespace kf::curve {

// A point with its derivatives by the curve's own parameter, to the third.
struct Jet {
  Vec2 p, d1, d2, d3;
};

// Which one-sided limit is wanted where derivatives jump (at a knot).
enum class Side { right, left };

// From a to b; parameter 0 to 1.
struct Line {
  Vec2 a, b;
};

// Circle of `radius` about `centre`, from angle `start` through `sweep` (positive: counter-clockwise,
// at most a full turn); parameter 0 to 1, linear in the angle. Domain: radius > 0, 0 < |sweep| <= 2 pi.
struct Arc {
  Vec2 centre;
  double radius = 1.0;
  double start = 0.0;
  double sweep = 1.0;
};

// Points centre + cos(t) u + sin(t) v, t from `start` through `sweep`; parameter 0 to 1, linear in t.
// u and v are conjugate half diameters: they need not be at right angles, so that any affine image is exact.
// Domain: cross(u, v) != 0, 0 < |sweep| <= 2 pi.
struct EllipticArc {
  Vec2 centre, u, v;
  double start = 0.0;
  double sweep = 1.0;
};

// Rational B-spline. Domain: degree 1..kMaxDegree; knots nondecreasing and finite, knots.size() =
// poles.size() + degree + 1; weights empty (all one) or one a pole, all > 0; parameter from knots[degree] to
// knots[poles.size()]. Use makeNurbs to build one that is checked.
struct Nurbs {
  int degree = 3;
  std::vector<double> knots;
  std::vector<Vec2> poles;
  std::vector<double> weights;
};

inline constexpr int kMaxDegree = 25;

// Fails  invalidArgument  any rule of Nurbs is broken; the message names the first one.
Result<Nurbs> makeNurbs(int degree, std::vector<double> knots, std::vector<Vec2> poles,
                        std::vector<double> weights = {});

// A periodic spline given the usual way (poles not repeated, knots over one period): the same curve, clamped.
// `knots` has poles.size() + 1 distinct-or-repeated values over the period [knots.front(), knots.back()].
// Fails  invalidArgument  as makeNurbs.
Result<Nurbs> makePeriodicNurbs(int degree, std::vector<double> knots, std::vector<Vec2> poles,
                                std::vector<double> weights = {});

// Cubic spline through `points` with chord-length parameters, C2 inside; end tangents are free (natural end)
// where the optional vector is null. Closed and periodic when the first point equals the last and both
// tangents are null. Fails  invalidArgument  fewer than two points, two neighbours equal, or a value that is
// not finite.
Result<Nurbs> interpolateCubic(const std::vector<Vec2>& points, const Vec2* startTangent = nullptr,
                               const Vec2* endTangent = nullptr);

// One curve of any kind, as a value.
class Curve {
 public:
  Curve(Line line) : shape_(line) {}
  Curve(Arc arc) : shape_(arc) {}
  Curve(EllipticArc arc) : shape_(arc) {}
  Curve(Nurbs nurbs) : shape_(std::move(nurbs)) {}

  const Line* asLine() const { return std::get_if<Line>(&shape_); }
  const Arc* asArc() const { return std::get_if<Arc>(&shape_); }
  const EllipticArc* asEllipticArc() const { return std::get_if<EllipticArc>(&shape_); }
  const Nurbs* asNurbs() const { return std::get_if<Nurbs>(&shape_); }

  double first() const;
  double last() const;
  // Domain: first() <= u <= last(); outside, the end span is continued.
  Vec2 point(double u) const;
  // Cost: O(degree^2) for splines after an O(log knots) search; no allocation.
  Jet jet(double u, Side side = Side::right) const;

  Vec2 startPoint() const { return point(first()); }
  Vec2 endPoint() const { return point(last()); }

  Curve reversed() const;
  // Exact; an arc becomes an elliptic arc unless the map is a similarity. Domain: determinant != 0.
  Curve transformed(const Affine2& map) const;
  // The stretch from a to b, first() <= a < b <= last(); exact (a spline is cut by knot insertion).
  Curve trimmed(double a, double b) const;
  // Tight for lines and arcs, and for splines to 1e-12 of their size.
  Box bounds() const;

  // Parameters strictly inside the domain where a derivative up to the third may jump (distinct inner knots).
  std::vector<double> breaks() const;

 private:
  std::variant<Line, Arc, EllipticArc, Nurbs> shape_;
};

// What differs from the parametrisation: unit tangent, signed curvature (1/mm, left turn positive) and its
// slope along arc length (1/mm^2). `regular` is false where the first derivative vanishes; then the rest is
// 0.
//   k = (x'y'' - y'x'') / |c'|^3,   dk/ds = (x'y''' - y'x''') / |c'|^4 - 3 k (c'.c'') / |c'|^3
struct Bend {
  Vec2 tangent;
  double k = 0.0;
  double dkds = 0.0;
  bool regular = true;
};
Bend bend(const Jet& jet);

// The bend as `u` is approached from one side. Where the speed vanishes to rounding (a cusp, a doubled pole)
// that of a place just inside: the tangent is then the limit to 1e-6. Domain: first() <= u <= last();
// Side::right needs room after u, Side::left before it.
Bend bendNear(const Curve& curve, double u, Side side);

}  // namespace kf::curve
