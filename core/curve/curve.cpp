// Lines, arcs, elliptic arcs, and the value that holds any curve.
// Lengths in mm, angles in rad.
#include "core/curve/curve.h"

#include <array>
#include <cassert>
#include <numbers>

#include "core/curve/nurbs.h"

namespace kf::curve {
namespace {

template <class... F>
struct Overload : F... {
  using F::operator()...;
};
template <class... F>
Overload(F...) -> Overload<F...>;

constexpr double kTurn = 2.0 * std::numbers::pi;

EllipticArc asEllipse(const Arc& arc) {
  return {arc.centre, {arc.radius, 0.0}, {0.0, arc.radius}, arc.start, arc.sweep};
}

Jet ellipseJet(const EllipticArc& e, double u) {
  const double t = e.start + u * e.sweep, w = e.sweep;
  const double c = std::cos(t), s = std::sin(t);
  const Vec2 radial = c * e.u + s * e.v, across = c * e.v - s * e.u;
  return {e.centre + radial, w * across, (-w * w) * radial, (-w * w * w) * across};
}

// Includes the places where a coordinate is stationary: tan t = v.x / u.x (or y), twice a turn.
Box ellipseBounds(const EllipticArc& e) {
  Box box;
  box.include(ellipseJet(e, 0.0).p);
  box.include(ellipseJet(e, 1.0).p);
  const double low = std::fmin(e.start, e.start + e.sweep), high = std::fmax(e.start, e.start + e.sweep);
  const std::array<double, 2> bases = {std::atan2(e.v.x, e.u.x), std::atan2(e.v.y, e.u.y)};
  for (double base : bases) {
    double t = base + std::numbers::pi * std::ceil((low - base) / std::numbers::pi);
    for (; t <= high; t += std::numbers::pi) box.include(e.centre + std::cos(t) * e.u + std::sin(t) * e.v);
  }
  return box;
}

Arc similarArc(const Arc& arc, const Affine2& map) {
  const Vec2 toStart{std::cos(arc.start), std::sin(arc.start)};
  const Vec2 image = map.vector(toStart);
  return {map.point(arc.centre), arc.radius * norm(map.vector({1.0, 0.0})), std::atan2(image.y, image.x),
          map.determinant() < 0.0 ? -arc.sweep : arc.sweep};
}

}  // namespace

double Curve::first() const {
  if (const Nurbs* n = asNurbs()) return n->knots[static_cast<std::size_t>(n->degree)];
  return 0.0;
}

double Curve::last() const {
  if (const Nurbs* n = asNurbs()) return n->knots[n->poles.size()];
  return 1.0;
}

Vec2 Curve::point(double u) const {
  if (const Line* line = asLine()) return u == 1.0 ? line->b : line->a + u * (line->b - line->a);
  return jet(u).p;
}

Jet Curve::jet(double u, Side side) const {
  return std::visit(Overload{
                        [u](const Line& l) {
                          return Jet{u == 1.0 ? l.b : l.a + u * (l.b - l.a), l.b - l.a, {}, {}};
                        },
                        [u](const Arc& a) { return ellipseJet(asEllipse(a), u); },
                        [u](const EllipticArc& e) { return ellipseJet(e, u); },
                        [u, side](const Nurbs& n) { return nurbsJet(n, u, side); },
                    },
                    shape_);
}

Curve Curve::reversed() const {
  return std::visit(Overload{
                        [](const Line& l) {
                          return Curve(Line{l.b, l.a});
                        },
                        [](const Arc& a) {
                          return Curve(Arc{a.centre, a.radius, a.start + a.sweep, -a.sweep});
                        },
                        [](const EllipticArc& e) {
                          return Curve(EllipticArc{e.centre, e.u, e.v, e.start + e.sweep, -e.sweep});
                        },
                        [](const Nurbs& n) { return Curve(nurbsReversed(n)); },
                    },
                    shape_);
}

Curve Curve::transformed(const Affine2& map) const {
  return std::visit(Overload{
                        [&map](const Line& l) {
                          return Curve(Line{map.point(l.a), map.point(l.b)});
                        },
                        [&map](const Arc& a) {
                          if (map.isSimilarity()) return Curve(similarArc(a, map));
                          const EllipticArc e = asEllipse(a);
                          return Curve(EllipticArc{map.point(e.centre), map.vector(e.u), map.vector(e.v),
                                                   e.start, e.sweep});
                        },
                        [&map](const EllipticArc& e) {
                          return Curve(EllipticArc{map.point(e.centre), map.vector(e.u), map.vector(e.v),
                                                   e.start, e.sweep});
                        },
                        [&map](Nurbs n) {
                          for (Vec2& pole : n.poles) pole = map.point(pole);
                          return Curve(std::move(n));
                        },
                    },
                    shape_);
}

Curve Curve::trimmed(double a, double b) const {
  assert(a < b);
  return std::visit(
      Overload{
          [a, b](const Line& l) {
            const Vec2 d = l.b - l.a;
            return Curve(Line{a == 0.0 ? l.a : l.a + a * d, b == 1.0 ? l.b : l.a + b * d});
          },
          [a, b](const Arc& r) {
            return Curve(Arc{r.centre, r.radius, r.start + a * r.sweep, (b - a) * r.sweep});
          },
          [a, b](const EllipticArc& e) {
            return Curve(EllipticArc{e.centre, e.u, e.v, e.start + a * e.sweep, (b - a) * e.sweep});
          },
          [a, b](const Nurbs& n) { return Curve(nurbsTrimmed(n, a, b)); },
      },
      shape_);
}

Box Curve::bounds() const {
  return std::visit(Overload{
                        [](const Line& l) {
                          Box box;
                          box.include(l.a);
                          box.include(l.b);
                          return box;
                        },
                        [](const Arc& a) { return ellipseBounds(asEllipse(a)); },
                        [](const EllipticArc& e) { return ellipseBounds(e); },
                        [](const Nurbs& n) { return nurbsBounds(n); },
                    },
                    shape_);
}

std::vector<double> Curve::breaks() const {
  if (const Nurbs* n = asNurbs()) return nurbsBreaks(*n);
  return {};
}

// With v = |c'|:  k = (c' x c'') / v^3. Since (c' x c'')' = c' x c''' and (v^3)' = 3 v (c'.c''),
// dk/du = (c' x c''') / v^3 - 3 k (c'.c'') / v^2, and dk/ds = (dk/du) / v.
Bend bend(const Jet& jet) {
  Bend b;
  const double v = norm(jet.d1);
  if (!(v > 0.0)) {
    b.regular = false;
    return b;
  }
  b.tangent = jet.d1 / v;
  // Divide by v early so that neither tiny nor huge parameter speeds overflow.
  const Vec2 d2 = jet.d2 / v, d3 = jet.d3 / v;
  b.k = cross(b.tangent, d2) / v;
  b.dkds = (cross(b.tangent, d3) / v - 3.0 * b.k * dot(b.tangent, d2)) / v;
  return b;
}

// At a cusp rounding leaves a first derivative of some 1e-16 of the others, whose direction means nothing.
Bend bendNear(const Curve& curve, double u, Side side) {
  const double width = curve.last() - curve.first();
  const auto at = [&](double step) {
    const Jet j = curve.jet(side == Side::right ? u + step * width : u - step * width, side);
    Bend b = bend(j);
    if (!(norm(j.d1) > 1e-12 * width * (norm(j.d2) + width * norm(j.d3)))) b = Bend{{}, 0.0, 0.0, false};
    return b;
  };
  Bend b = at(0.0);
  for (double step = 1e-9; !b.regular && step < 1e-3; step *= 10.0) b = at(step);
  return b;
}

}  // namespace kf::curve
