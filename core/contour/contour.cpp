// Joints, length, area and orientation of a contour.
// Lengths in mm, angles in rad.
#include "core/contour/contour.h"

#include <algorithm>
#include <cmath>

#include "core/curve/arc_length.h"
#include "core/numeric/gauss_legendre.h"
#include "core/numeric/roots.h"

namespace kf::contour {
namespace {

using curve::Bend;
using curve::Curve;
using curve::Side;
using curve::Vec2;

// The tangent and curvature as the end of the domain is approached.
Bend bendAtEnd(const Curve& c, bool atStart) {
  return curve::bendNear(c, atStart ? c.first() : c.last(), atStart ? Side::right : Side::left);
}

Joint jointBetween(const Curve& before, const Curve& after, const JointOptions& options) {
  Joint joint;
  joint.point = after.startPoint();
  joint.gap = curve::distance(before.endPoint(), joint.point);
  const Bend in = bendAtEnd(before, false), out = bendAtEnd(after, true);
  joint.turn = std::atan2(curve::cross(in.tangent, out.tangent), curve::dot(in.tangent, out.tangent));
  joint.curvatureChange = out.k - in.k;
  const double larger = std::max(std::abs(in.k), std::abs(out.k));
  if (std::abs(joint.turn) > options.angleTolerance) {
    joint.kind = JointKind::tangentBreak;
  } else if (std::abs(joint.curvatureChange) > std::max(options.curvatureTolerance, 1e-4 * larger)) {
    joint.kind = JointKind::curvatureStep;
  }
  return joint;
}

// Integral of `rate` from a to b: ten-point Gauss against its two halves until they agree to 1e-13, or to
// `noise`.
template <class Rate>
double integral(const Rate& rate, double a, double b, double whole, double noise, int depth) {
  const double m = 0.5 * (a + b);
  const double left = numeric::gauss10(rate, a, m), right = numeric::gauss10(rate, m, b);
  const double difference = std::abs(left + right - whole);
  constexpr int kDeepest = 40;
  if (!(difference > std::max(noise, 1e-13 * (std::abs(left) + std::abs(right)))) || depth == kDeepest)
    return left + right;
  return integral(rate, a, m, left, noise, depth + 1) + integral(rate, m, b, right, noise, depth + 1);
}

// Twice the area swept about `origin`: the integral of (c - o) x c' du.
double sweptTwice(const Curve& c, Vec2 origin) {
  if (const curve::Line* line = c.asLine()) return curve::cross(line->a - origin, line->b - line->a);
  std::vector<double> cuts{c.first()};
  for (double u : c.breaks()) cuts.push_back(u);
  cuts.push_back(c.last());
  double sum = 0.0;
  const auto rate = [&](double u) {
    const curve::Jet j = c.jet(u);
    return curve::cross(j.p - origin, j.d1);
  };
  const curve::Box box = c.bounds();
  const double size = box.width() + box.height();
  const double far = curve::norm(box.low) + curve::norm(box.high) + curve::norm(origin);
  const double noise = 1e-16 * size * (size + far);  // rounding of the coordinates
  for (std::size_t i = 0; i + 1 < cuts.size(); ++i)
    sum += integral(rate, cuts[i], cuts[i + 1], numeric::gauss10(rate, cuts[i], cuts[i + 1]), noise, 0);
  return sum;
}

// Places strictly inside the smooth span [a, b] where the speed vanishes: minima of |c'| that reach zero to
// rounding.
void findCusps(const Curve& c, double a, double b, std::vector<double>& cuts) {
  constexpr int kParts = 24;
  const auto place = [a, b](int i) { return i == kParts ? b : a + (b - a) * i / kParts; };
  const auto rise = [&c](double u) {
    const curve::Jet j = c.jet(u);
    return curve::dot(j.d1, j.d2);
  };
  double fastest = 0.0;
  for (int i = 0; i <= kParts; ++i) fastest = std::max(fastest, curve::norm(c.jet(place(i)).d1));
  double before = rise(a);
  for (int i = 1; i <= kParts; ++i) {
    const double now = rise(i == kParts ? b - 1e-9 * (b - a) : place(i));
    if (before <= 0.0 && now > 0.0) {
      const double u = numeric::findRoot(rise, place(i - 1), place(i), 0.0);
      const bool inside = u > a + 1e-9 * (b - a) && u < b - 1e-9 * (b - a);
      if (inside && curve::norm(c.jet(u).d1) <= 1e-9 * fastest) cuts.push_back(u);
    }
    before = now;
  }
}

// Where a curve may change its direction or curvature at once: knots of multiplicity >= degree - 1, and
// cusps.
std::vector<double> splitPlaces(const Curve& c) {
  std::vector<double> cuts;
  const curve::Nurbs* spline = c.asNurbs();
  if (spline == nullptr) return cuts;
  const auto& knots = spline->knots;
  double from = c.first();
  std::vector<double> ends = c.breaks();
  ends.push_back(c.last());
  for (double to : ends) {
    if (spline->degree > 1) findCusps(c, from, to, cuts);
    const auto range = std::equal_range(knots.begin(), knots.end(), to);
    if (to < c.last() && range.second - range.first >= spline->degree - 1) cuts.push_back(to);
    from = to;
  }
  return cuts;
}

}  // namespace

std::vector<Joint> findJoints(const Contour& contour, const JointOptions& options) {
  std::vector<Joint> joints;
  const std::size_t n = contour.segments.size();
  double s = 0.0;
  for (std::size_t i = 0; i < n; ++i) {
    s += curve::totalLength(contour.segments[i].curve);
    if (i + 1 == n && !contour.closed) break;
    Joint joint = jointBetween(contour.segments[i].curve, contour.segments[(i + 1) % n].curve, options);
    joint.before = i;
    joint.s = s;
    joints.push_back(joint);
  }
  return joints;
}

Contour splitAtKnots(const Contour& contour) {
  Contour out = contour;
  out.segments.clear();
  for (const Segment& segment : contour.segments) {
    std::vector<double> cuts = splitPlaces(segment.curve);
    if (cuts.empty()) {
      out.segments.push_back(segment);
      continue;
    }
    double from = segment.curve.first();
    cuts.push_back(segment.curve.last());
    for (double to : cuts) {
      out.segments.push_back({segment.curve.trimmed(from, to), segment.source});
      from = to;
    }
  }
  return out;
}

double length(const Contour& contour) {
  double sum = 0.0;
  for (const Segment& segment : contour.segments) sum += curve::totalLength(segment.curve);
  return sum;
}

curve::Box bounds(const Contour& contour) {
  curve::Box box;
  for (const Segment& segment : contour.segments) box.include(segment.curve.bounds());
  return box;
}

Contour reversed(const Contour& contour) {
  Contour out = contour;
  std::reverse(out.segments.begin(), out.segments.end());
  for (Segment& segment : out.segments) segment.curve = segment.curve.reversed();
  return out;
}

double signedArea(const Contour& contour) {
  if (!contour.closed || contour.segments.empty()) return 0.0;
  const Vec2 origin = contour.segments.front().curve.startPoint();
  double twice = 0.0;
  for (std::size_t i = 0; i < contour.segments.size(); ++i) {
    const Curve& c = contour.segments[i].curve;
    twice += sweptTwice(c, origin);
    // A gap within the chaining tolerance is crossed straight.
    const Vec2 end = c.endPoint(),
               next = contour.segments[(i + 1) % contour.segments.size()].curve.startPoint();
    twice += curve::cross(end - origin, next - end);
  }
  return 0.5 * twice;
}

}  // namespace kf::contour
