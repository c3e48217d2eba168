// First pass of node placement: smooth stretches with their length and a density of nodes.
// Lengths in mm.
#include "core/path/stretches.h"

#include <algorithm>
#include <cmath>
#include <numbers>

#include "core/curve/arc_length.h"
#include "core/numeric/gauss_legendre.h"
#include "core/numeric/roots.h"

namespace kf::path {
namespace {

using curve::Bend;
using curve::Curve;
using curve::Side;

constexpr int kFineParts = 16;  // samples between two mandatory nodes
constexpr int kScanParts = 24;  // samples of a span when extrema are looked for

// Where x' or y' vanishes on a circular arc, strictly inside: every quarter turn of the angle.
std::vector<double> quarterPoints(const curve::Arc& arc) {
  std::vector<double> cuts;
  const double quarter = 0.5 * std::numbers::pi;
  const double low = std::min(arc.start, arc.start + arc.sweep),
               high = std::max(arc.start, arc.start + arc.sweep);
  for (double angle = quarter * std::ceil(low / quarter); angle <= high; angle += quarter) {
    const double u = (angle - arc.start) / arc.sweep;
    if (u > 1e-9 && u < 1.0 - 1e-9) cuts.push_back(u);
  }
  return cuts;
}

// Zeros of x', y' and dk/ds strictly inside the smooth span [a, b], found by sign changes between samples.
void findCuts(const Curve& c, double a, double b, std::vector<double>& cuts) {
  const auto along = [&c](double u, int what) {
    const Bend bend = curve::bend(c.jet(u));
    return what == 0 ? bend.tangent.x : what == 1 ? bend.tangent.y : bend.dkds;
  };
  const double margin = 1e-9 * (b - a);
  double before[3] = {}, zero[3] = {HUGE_VAL, HUGE_VAL, HUGE_VAL};  // last value, and an exact zero since
  for (int i = 0; i <= kScanParts; ++i) {
    const double u = i == 0 ? a + margin : i == kScanParts ? b - margin : a + (b - a) * i / kScanParts;
    const Bend bend = curve::bend(c.jet(u));
    const double now[3] = {bend.tangent.x, bend.tangent.y, bend.dkds};
    for (int what = 0; what < 3; ++what) {
      if (now[what] == 0.0) {
        if (before[what] != 0.0 && zero[what] == HUGE_VAL) zero[what] = u;
        continue;
      }
      const double previous = before[what], between = zero[what];
      before[what] = now[what];
      zero[what] = HUGE_VAL;
      if (previous == 0.0 || (previous < 0.0) == (now[what] < 0.0)) continue;
      if (between != HUGE_VAL) {
        cuts.push_back(between);
        continue;
      }
      const double from = i == 1 ? a + margin : a + (b - a) * (i - 1) / kScanParts;
      cuts.push_back(numeric::findRoot([&](double x) { return along(x, what); }, from, u, 1e-13 * (b - a)));
    }
  }
}

// Parameters of all mandatory nodes of a segment, ends included; inner knots are marked.
struct Cut {
  double u;
  bool knot;
};

std::vector<Cut> mandatoryCuts(const Curve& c) {
  std::vector<Cut> cuts{{c.first(), false}, {c.last(), false}};
  if (c.asLine() != nullptr) return cuts;
  if (const curve::Arc* arc = c.asArc()) {
    for (double u : quarterPoints(*arc)) cuts.push_back({u, false});
  } else {
    std::vector<double> knots{c.first()};
    for (double u : c.breaks()) {
      cuts.push_back({u, true});
      knots.push_back(u);
    }
    knots.push_back(c.last());
    std::vector<double> found;
    for (std::size_t i = 0; i + 1 < knots.size(); ++i) {
      findCuts(c, knots[i], knots[i + 1], found);
      for (double u : found) cuts.push_back({u, false});
      found.clear();
    }
  }
  std::sort(cuts.begin(), cuts.end(),
            [](const Cut& a, const Cut& b) { return a.u < b.u || (a.u == b.u && a.knot && !b.knot); });
  // Two mandatory places closer than rounding allows become one; a knot and the ends win.
  const double apart = 1e-7 * (c.last() - c.first());
  std::vector<Cut> kept;
  for (const Cut& cut : cuts) {
    if (!kept.empty() && cut.u - kept.back().u <= (cut.knot || kept.back().knot ? 0.0 : apart)) {
      if (cut.u == c.last()) kept.back().u = cut.u;
      continue;
    }
    kept.push_back(cut);
  }
  if (kept.back().u != c.last()) kept.back() = {c.last(), false};
  return kept;
}

Result<void> sampleStretch(const Curve& c, Stretch& stretch) {
  if (c.asLine() != nullptr || c.asArc() != nullptr) {
    const double k = c.asArc() != nullptr ? 1.0 / c.asArc()->radius : 0.0;
    auto even = curve::arcLength(c, stretch.from, stretch.to);
    if (!even) return even.error();
    stretch.length = even->length;
    stretch.u = {stretch.from, stretch.to};
    stretch.s = {0.0, stretch.length};
    stretch.turn = {0.0, k * stretch.length};
    stretch.swing = {0.0, 0.0};
    return {};
  }
  double s = 0.0, turn = 0.0, swing = 0.0;
  double lastK = 0.0, lastSwing = 0.0;
  for (int i = 0; i <= kFineParts; ++i) {
    const double u =
        i == kFineParts ? stretch.to : stretch.from + (stretch.to - stretch.from) * i / kFineParts;
    const Bend bend = curve::bendNear(c, u, i == kFineParts ? Side::left : Side::right);
    const double k = std::abs(bend.k), root = std::sqrt(std::abs(bend.dkds));
    if (i > 0) {
      auto part = curve::arcLength(c, stretch.u.back(), u);
      if (!part) return part.error();
      s += part->length;
      turn += 0.5 * part->length * (k + lastK);
      swing += 0.5 * part->length * (root + lastSwing);
    }
    stretch.u.push_back(u);
    stretch.s.push_back(s);
    stretch.turn.push_back(turn);
    stretch.swing.push_back(swing);
    lastK = k;
    lastSwing = root;
  }
  stretch.length = s;
  if (!std::isfinite(turn) || !std::isfinite(swing)) {
    return Error{ErrorCode::invalidArgument, "the curvature of a curve is not finite"};
  }
  return {};
}

BreakKind breakKind(contour::JointKind kind) {
  switch (kind) {
    case contour::JointKind::tangentBreak:
      return BreakKind::tangentBreak;
    case contour::JointKind::curvatureStep:
      return BreakKind::curvatureStep;
    case contour::JointKind::smooth:
      break;
  }
  return BreakKind::smooth;
}

Error namedAfter(const contour::Segment& segment, Error error) {
  if (!segment.source.empty()) error.message = segment.source + ": " + error.message;
  return error;
}

}  // namespace

Result<Stretches> findStretches(const contour::Contour& contour, const Options& options,
                                RunControl& control) {
  Stretches all;
  const std::vector<contour::Joint> joints =
      contour::findJoints(contour, {options.angleTolerance, options.curvatureTolerance});
  const double least = std::min(1e-6, 1e-9 * contour::length(contour));
  BreakKind carried = BreakKind::none;
  for (std::size_t i = 0; i < contour.segments.size(); ++i) {
    if (control.isCancelled()) return Error{ErrorCode::cancelled, "cancelled"};
    const contour::Segment& segment = contour.segments[i];
    const curve::Box box = segment.curve.bounds();
    // The box alone would pass over NaN.
    if (!curve::isFinite(box.low) || !curve::isFinite(box.high) ||
        !curve::isFinite(segment.curve.startPoint()) || !curve::isFinite(segment.curve.endPoint())) {
      return namedAfter(segment, {ErrorCode::invalidArgument,
                                  "a coordinate is not a finite number; correct it in the drawing"});
    }
    const std::vector<Cut> cuts = mandatoryCuts(segment.curve);
    for (std::size_t j = 0; j + 1 < cuts.size(); ++j) {
      Stretch stretch;
      stretch.segment = static_cast<std::uint32_t>(i);
      stretch.from = cuts[j].u;
      stretch.to = cuts[j + 1].u;
      stretch.start = all.length;
      if (j > 0) {
        stretch.breakBefore = cuts[j].knot ? BreakKind::smooth : BreakKind::none;
      } else if (i > 0) {
        stretch.breakBefore = breakKind(joints[i - 1].kind);
      }
      if (auto sampled = sampleStretch(segment.curve, stretch); !sampled)
        return namedAfter(segment, sampled.error());
      // Doubled poles, or what rounding left between two neighbours: no way to travel. What breaks there still counts.
      if (!(stretch.length > least)) {
        carried = std::max(carried, stretch.breakBefore);
        continue;
      }
      stretch.breakBefore = std::max(stretch.breakBefore, carried);
      carried = BreakKind::none;
      all.length += stretch.length;
      all.turn += stretch.turn.back();
      all.swing += stretch.swing.back();
      all.list.push_back(std::move(stretch));
    }
  }
  if (!(all.length > 0.0) || !std::isfinite(all.length)) {
    return Error{ErrorCode::invalidArgument,
                 "the contour " + contour.name + " has no length; choose another one"};
  }
  if (contour.closed) all.closing = breakKind(joints.back().kind);
  return all;
}

}  // namespace kf::path
