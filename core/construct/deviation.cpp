// How far a replacement strays from what it replaces, with a proof.
// Lengths in mm.
#include "core/construct/deviation.h"

#include <algorithm>
#include <cmath>

namespace kf::construct {
namespace {

using curve::Curve;
using curve::Jet;
using curve::Vec2;

// Where the blend passes the corner most closely, by Newton from its middle.
double nearestToCorner(const Bezier5& blend, Vec2 corner) {
  double t = 0.5;
  for (int step = 0; step < 12; ++step) {
    const Jet j = bezierJet(blend, t);
    const Vec2 away = j.p - corner;
    const double slope = curve::dot(j.d1, j.d1) + curve::dot(away, j.d2);
    const double move = slope > 0.0 ? curve::dot(away, j.d1) / slope : 0.0;
    const double next = std::clamp(t - move, 0.1, 0.9);
    if (std::abs(next - t) < 1e-9) break;
    t = next;
  }
  return t;
}

// |B''| <= 20 times the largest second difference of the poles, and a chord over a parameter width h stays
// within h^2 |B''| / 8 of its curve.
double blendHeight(const Bezier5& b, double width) {
  double largest = 0.0;
  for (std::size_t i = 0; i + 2 < b.size(); ++i)
    largest = std::max(largest, curve::norm(b[i + 2] - 2.0 * b[i + 1] + b[i]));
  return 2.5 * width * width * largest;
}

// One side of the joint: the blend on [t0, t1] against the part. The last match is the part's own end.
double sideBound(const Bezier5& blend, double t0, double t1, const CurvePart& part, std::size_t pieces) {
  const double width = (t1 - t0) / static_cast<double>(pieces);
  const double ownHeight = blendHeight(blend, width);
  double u = part.from, worst = 0.0;
  double lastGap = curve::distance(bezierPoint(blend, t0), part.curve->point(u));
  for (std::size_t i = 1; i <= pieces; ++i) {
    const Vec2 p = bezierPoint(blend, i == pieces ? t1 : t0 + width * static_cast<double>(i));
    const double next = i == pieces ? part.to : followClosest(*part.curve, u, part.to, p);
    const double gap = curve::distance(p, part.curve->point(next));
    const double height = next > u ? chordHeight({part.curve, u, next}) : 0.0;
    worst = std::max(worst, std::max(gap, lastGap) + ownHeight + height);
    lastGap = gap;
    u = next;
  }
  return worst;
}

}  // namespace

double distanceToChord(Vec2 p, Vec2 a, Vec2 b) {
  const Vec2 d = b - a;
  const double square = curve::dot(d, d);
  const double t = square > 0.0 ? std::clamp(curve::dot(p - a, d) / square, 0.0, 1.0) : 0.0;
  return curve::distance(p, a + t * d);
}

Vec2 bezierPoint(const Bezier5& b, double t) {
  Bezier5 c = b;
  for (std::size_t r = 1; r < 6; ++r) {
    for (std::size_t i = 0; i + r < 6; ++i) c[i] = (1.0 - t) * c[i] + t * c[i + 1];
  }
  return c[0];
}

Jet bezierJet(const Bezier5& b, double t) {
  Bezier5 c = b;
  Jet j;
  // De Casteljau; after two, three and four rounds what remains gives the derivatives.
  for (std::size_t r = 1; r < 6; ++r) {
    if (r == 3) j.d3 = 60.0 * (c[3] - 3.0 * c[2] + 3.0 * c[1] - c[0]);
    if (r == 4) j.d2 = 20.0 * (c[2] - 2.0 * c[1] + c[0]);
    if (r == 5) j.d1 = 5.0 * (c[1] - c[0]);
    for (std::size_t i = 0; i + r < 6; ++i) c[i] = (1.0 - t) * c[i] + t * c[i + 1];
  }
  j.p = c[0];
  return j;
}

Curve bezierCurve(const Bezier5& b) {
  curve::Nurbs n;
  n.degree = 5;
  n.knots.assign(6, 0.0);
  n.knots.insert(n.knots.end(), 6, 1.0);
  n.poles.assign(b.begin(), b.end());
  return n;
}

double chordHeight(const CurvePart& part) {
  const double width = part.to - part.from;
  if (part.curve->asLine() != nullptr) return 0.0;
  if (const curve::Arc* arc = part.curve->asArc()) {
    const double half = 0.5 * std::abs(arc->sweep) * width;
    return half < 1.5 ? arc->radius * 2.0 * std::pow(std::sin(0.5 * half), 2) : 2.0 * arc->radius;
  }
  if (const curve::EllipticArc* e = part.curve->asEllipticArc()) {
    const double swept = e->sweep * width;
    return swept * swept / 8.0 * std::hypot(curve::norm(e->u), curve::norm(e->v));
  }
  const Curve piece = part.curve->trimmed(part.from, part.to);
  const curve::Nurbs& n = *piece.asNurbs();
  double height = 0.0;
  for (Vec2 pole : n.poles) height = std::max(height, distanceToChord(pole, n.poles.front(), n.poles.back()));
  return height;
}

double followClosest(const Curve& c, double from, double to, Vec2 p) {
  if (const curve::Line* line = c.asLine()) {
    const Vec2 d = line->b - line->a;
    return std::clamp(curve::dot(p - line->a, d) / curve::dot(d, d), from, to);
  }
  if (const curve::Arc* arc = c.asArc()) {
    // The angle from the direction at `from`, in -pi..pi, turned to a parameter.
    const double base = arc->start + from * arc->sweep;
    const Vec2 r = p - arc->centre;
    const double x = std::cos(base) * r.x + std::sin(base) * r.y,
                 y = std::cos(base) * r.y - std::sin(base) * r.x;
    return std::clamp(from + std::atan2(y, x) / arc->sweep, from, to);
  }
  double u = from;
  for (int step = 0; step < 20; ++step) {
    const Jet j = c.jet(u);
    const double speed = curve::dot(j.d1, j.d1), bent = speed + curve::dot(j.p - p, j.d2);
    const double slope = bent > 0.1 * speed ? bent : speed;
    if (!(slope > 0.0)) break;
    const double next = std::clamp(u - curve::dot(j.p - p, j.d1) / slope, from, to);
    const bool settled = std::abs(next - u) <= 1e-10 * (to - from);
    u = next;
    if (settled) break;
  }
  return u;
}

double replacementBound(const Bezier5& blend, const CurvePart& before, const CurvePart& after,
                        std::size_t pieces) {
  const double middle = nearestToCorner(blend, before.curve->point(before.to));
  const std::size_t half = std::max<std::size_t>(pieces / 2, 1);
  const double first = sideBound(blend, 0.0, middle, before, half);
  // The second side is matched from its start at the corner; its own end is the blend's end.
  return std::max(first, sideBound(blend, middle, 1.0, after, half));
}

}  // namespace kf::construct
