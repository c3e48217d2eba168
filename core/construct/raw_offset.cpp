// Offsets piece by piece, before anything is trimmed.
// Lengths in mm, angles in rad.
#include "core/construct/raw_offset.h"

#include <algorithm>
#include <array>
#include <cmath>
#include <numbers>

#include "core/construct/deviation.h"
#include "core/numeric/roots.h"

namespace kf::construct {
namespace {

using curve::Arc;
using curve::Bend;
using curve::Curve;
using curve::Jet;
using curve::Line;
using curve::Side;
using curve::Vec2;

constexpr int kDeepest = 14;

// O = C + d N with N to the left: N' = -k v T, so O' = (1 - d k) C' and O'' = (1 - d k) C'' - d (dk/du) C'.
struct OffsetJet {
  Vec2 p, d1, d2;
  double stretch = 1.0;  // 1 - d k
  bool regular = true;
};

OffsetJet offsetJet(const Curve& c, double u, Side side, double d) {
  const Jet j = c.jet(u, side);
  const Bend b = curve::bend(j);
  const double stretch = 1.0 - d * b.k;
  return {j.p + d * curve::leftOf(b.tangent), stretch * j.d1,
          stretch * j.d2 - (d * b.dkds * curve::norm(j.d1)) * j.d1, stretch, b.regular};
}

Bezier5 hermite(const OffsetJet& a, const OffsetJet& b, double h) {
  return {a.p,
          a.p + (h / 5.0) * a.d1,
          a.p + (2.0 * h / 5.0) * a.d1 + (h * h / 20.0) * a.d2,
          b.p - (2.0 * h / 5.0) * b.d1 + (h * h / 20.0) * b.d2,
          b.p - (h / 5.0) * b.d1,
          b.p};
}

struct Span {
  double low, high;
  Bezier5 b;
};

// Piecewise quintic Hermite interpolation of the offset on [low, high], halved until it is within the
// tolerance.
class OffsetFit {
 public:
  OffsetFit(const Curve& c, double d, double tolerance) : c_(c), d_(d), tolerance_(tolerance) {}

  Result<void> fit(double low, double high) {
    const OffsetJet a = offsetJet(c_, low, Side::right, d_), b = offsetJet(c_, high, Side::left, d_);
    return halve(low, a, high, b, 0);
  }
  double error() const { return error_; }

  // One C2 quintic spline: inner knots threefold. Pole j is the blossom at the knots j+1 .. j+5.
  Curve spline() const {
    curve::Nurbs n;
    n.degree = 5;
    n.knots.assign(6, spans_.front().low);
    for (std::size_t i = 1; i < spans_.size(); ++i) n.knots.insert(n.knots.end(), 3, spans_[i].low);
    n.knots.insert(n.knots.end(), 6, spans_.back().high);
    const std::size_t count = n.knots.size() - 6;
    for (std::size_t j = 0; j < count; ++j) {
      const std::size_t span = std::min(j < 5 ? 0 : (j - 3) / 3, spans_.size() - 1);
      n.poles.push_back(blossom(spans_[span], &n.knots[j + 1]));
    }
    return n;
  }

 private:
  static Vec2 blossom(const Span& span, const double* arguments) {
    Bezier5 b = span.b;
    for (std::size_t r = 0; r < 5; ++r) {
      const double t = (arguments[r] - span.low) / (span.high - span.low);
      for (std::size_t i = 0; i + r < 5; ++i) b[i] = (1.0 - t) * b[i] + t * b[i + 1];
    }
    return b[0];
  }

  Result<void> halve(double low, const OffsetJet& a, double high, const OffsetJet& b, int depth) {
    const Bezier5 made = hermite(a, b, high - low);
    double error = 0.0;
    for (double t : {0.25, 0.5, 0.75}) {
      const OffsetJet there = offsetJet(c_, low + t * (high - low), Side::right, d_);
      if (!there.regular)
        return Error{ErrorCode::invalidArgument, "a curve has a cusp; split it there first"};
      error = std::max(error, curve::distance(bezierPoint(made, t), there.p));
    }
    if (error > 0.8 * tolerance_ && depth < kDeepest) {
      const double middle = 0.5 * (low + high);
      const OffsetJet m = offsetJet(c_, middle, Side::right, d_);
      if (auto first = halve(low, a, middle, m, depth + 1); !first) return first;
      return halve(middle, m, high, b, depth + 1);
    }
    error_ = std::max(error_, error);
    spans_.push_back({low, high, made});
    return {};
  }

  const Curve& c_;
  double d_, tolerance_;
  double error_ = 0.0;
  std::vector<Span> spans_;
};

// Stretches of the smooth span [low, high] on which the offset runs forward (1 - d k > 0).
std::vector<std::pair<double, double>> forwardStretches(const Curve& c, double low, double high, double d) {
  constexpr int kParts = 32;
  const auto stretch = [&](double u) {
    return offsetJet(c, u, u >= high ? Side::left : Side::right, d).stretch;
  };
  std::vector<std::pair<double, double>> kept;
  double before = stretch(low), start = low;
  for (int i = 1; i <= kParts; ++i) {
    const double a = low + (high - low) * (i - 1) / kParts,
                 b = i == kParts ? high : low + (high - low) * i / kParts;
    const double now = stretch(b);
    if ((before > 0.0) != (now > 0.0)) {
      const double root = numeric::findRoot(stretch, a, b, 1e-14 * (high - low));
      if (before > 0.0 && root > start) kept.emplace_back(start, root);
      start = root;
    }
    before = now;
  }
  if (before > 0.0 && high > start) kept.emplace_back(start, high);
  return kept;
}

Result<void> addCurve(const Curve& c, std::uint32_t contour, std::uint32_t segment, double d,
                      double tolerance, RawOffset& raw) {
  double low = c.first();
  std::vector<double> cuts = c.breaks();
  cuts.push_back(c.last());
  for (double high : cuts) {
    for (const auto& [from, to] : forwardStretches(c, low, high, d)) {
      OffsetFit fit(c, d, tolerance);
      if (auto done = fit.fit(from, to); !done) return done;
      raw.error = std::max(raw.error, fit.error());
      raw.pieces.push_back({fit.spline(), contour, segment, false});
    }
    low = high;
  }
  return {};
}

void addCorner(const contour::Contour& contour, std::uint32_t index, std::uint32_t i, double d,
               RawOffset& raw) {
  const Curve& a = contour.segments[i].curve;
  const Curve& b = contour.segments[(i + 1) % contour.segments.size()].curve;
  const Vec2 in = endBend(a, false).tangent, out = endBend(b, true).tangent;
  double turn = std::atan2(curve::cross(in, out), curve::dot(in, out));
  if (std::abs(turn) > std::numbers::pi - 1e-9) turn = d > 0.0 ? -std::numbers::pi : std::numbers::pi;
  if (!(turn * d < 0.0) || std::abs(turn * d) < 1e-9) return;
  const Vec2 normal = d * curve::leftOf(in);
  raw.pieces.push_back(
      {Arc{b.startPoint(), std::abs(d), std::atan2(normal.y, normal.x), turn}, index, i, true});
}

}  // namespace

Bend endBend(const Curve& c, bool atStart) {
  const double from = c.first(), to = c.last();
  const Side side = atStart ? Side::right : Side::left;
  Bend b = curve::bend(c.jet(atStart ? from : to, side));
  for (double step = 1e-9; !b.regular && step < 1e-3; step *= 10.0)
    b = curve::bend(c.jet(atStart ? from + step * (to - from) : to - step * (to - from), side));
  return b;
}

Result<void> addRawOffset(const contour::Contour& contour, std::uint32_t index, double d, double tolerance,
                          RawOffset& raw) {
  const auto n = static_cast<std::uint32_t>(contour.segments.size());
  for (std::uint32_t i = 0; i < n; ++i) {
    const Curve& c = contour.segments[i].curve;
    if (const Line* line = c.asLine()) {
      const Vec2 shift = d * curve::leftOf(curve::unit(line->b - line->a));
      raw.pieces.push_back({Line{line->a + shift, line->b + shift}, index, i, false});
    } else if (const Arc* arc = c.asArc()) {
      const double radius = arc->radius - (arc->sweep > 0.0 ? d : -d);
      if (radius > 1e-9 * arc->radius)
        raw.pieces.push_back({Arc{arc->centre, radius, arc->start, arc->sweep}, index, i, false});
    } else if (auto done = addCurve(c, index, i, d, tolerance, raw); !done) {
      return Error{done.error().code, contour.name + ": " + done.error().message};
    }
    if (i + 1 < n || contour.closed) addCorner(contour, index, i, d, raw);
  }
  return {};
}

}  // namespace kf::construct
