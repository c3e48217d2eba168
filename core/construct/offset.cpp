// The path of the tool's centre beside a contour.
// Lengths in mm, angles in rad.
#include "core/construct/offset.h"

#include <cmath>

#include <fmt/format.h>

#include "core/construct/trim.h"
#include "core/construct/uncut.h"
#include "core/curve/arc_length.h"

namespace kf::construct {
namespace {

using contour::Contour;
using curve::Vec2;

Error invalid(std::string message) {
  return {ErrorCode::invalidArgument, std::move(message)};
}

// Cut where curvature may jump, and with gaps closed by straight pieces.
Contour prepared(const Contour& contour) {
  Contour whole = contour::splitAtKnots(contour);
  Contour out = whole;
  out.segments.clear();
  const std::size_t n = whole.segments.size();
  for (std::size_t i = 0; i < n; ++i) {
    out.segments.push_back(whole.segments[i]);
    if (i + 1 == n && !whole.closed) break;
    const Vec2 end = whole.segments[i].curve.endPoint(),
               next = whole.segments[(i + 1) % n].curve.startPoint();
    if (curve::distance(end, next) > 1e-9) out.segments.push_back({curve::Line{end, next}, "gap"});
  }
  return out;
}

class Offsetter {
 public:
  Offsetter(const std::vector<Contour>& contours, const OffsetOptions& options) : options_(options) {
    for (const Contour& contour : contours) contours_.push_back(prepared(contour));
  }

  // `wider` is added to the radius of the path, not to what it is checked against.
  Result<OffsetReport> run(double wider, RunControl& control) {
    const double radius = options_.radius + wider;
    const double distance = options_.side == ToolSide::left ? radius : -radius;
    for (std::uint32_t i = 0; i < contours_.size(); ++i) {
      if (auto done = addRawOffset(contours_[i], i, distance, options_.curveTolerance, raw_); !done)
        return done.error();
    }
    report_.curveError = raw_.error;
    const Clearance clearance(contours_);
    auto trimmed = trim(raw_, clearance, radius, control);
    if (!trimmed) return trimmed.error();
    trimmed_ = std::move(*trimmed);
    if (auto verified = verify(clearance); !verified) return verified.error();
    if (auto made = assemble(); !made) return made.error();
    const Clearance paths(report_.paths);
    for (std::size_t i = 0; i < contours_.size(); ++i) {
      for (UncutPlace& place : uncutPlaces(contours_[i], i, raw_, trimmed_, paths, options_))
        report_.uncut.push_back(place);
    }
    if (options_.uncut == UncutPolicy::refuse && !report_.uncut.empty()) return refusal();
    return std::move(report_);
  }

 private:
  Result<void> verify(const Clearance& clearance) const {
    const double least = options_.radius - 1e-6 - 2.0 * raw_.error;
    for (const SubPiece& sub : trimmed_.subPieces) {
      if (!sub.kept) continue;
      const curve::Curve& c = raw_.pieces[sub.piece].curve;
      for (double part : {0.02, 0.26, 0.74, 0.98}) {
        const Vec2 p = c.point(sub.from + part * (sub.to - sub.from));
        if (!clearance.isClear(p, least)) return unverified(p);
      }
    }
    return {};
  }

  Error unverified(Vec2 p) const {
    return {ErrorCode::notConverged,
            fmt::format(
                "{}: the tool path could not be verified near x {:.3f}, y {:.3f}; change the tool diameter "
                "a little or mend the contour there",
                contours_.front().name, p.x, p.y)};
  }

  double lengthOf(const Chain& chain) const {
    double length = 0.0;
    for (std::uint32_t i : chain.subPieces) {
      const SubPiece& sub = trimmed_.subPieces[i];
      const auto part = curve::arcLength(raw_.pieces[sub.piece].curve, sub.from, sub.to, 1e-6);
      length += part ? part->length : 0.0;
    }
    return length;
  }

  Result<void> assemble() {
    // At an inner corner of turn t the spurs beyond the crossing are r t / 2 long and r t^2 / 4 too close in
    // their middle: those that pass for clear are shorter than sqrt(r slack).
    const double spur =
        std::max(1e-4, 8.0 * std::sqrt(options_.radius * closenessSlack(raw_, options_.radius)));
    std::vector<std::size_t> parts(contours_.size(), 0);
    for (const Chain& chain : trimmed_.chains) {
      const RawPiece& first = raw_.pieces[trimmed_.subPieces[chain.subPieces.front()].piece];
      const Contour& source = contours_[first.contour];
      const double length = lengthOf(chain);
      if (!chain.closed && length < spur) continue;
      if (chain.closed && length < 1e-5) continue;
      if (!chain.closed && source.closed) return unverified(trimmed_.subPieces[chain.subPieces.back()].end);
      const std::size_t part = ++parts[first.contour];
      Contour path = pathOf(chain);
      path.name = part == 1 ? source.name : fmt::format("{}, part {}", source.name, part);
      path.layer = source.layer;
      report_.paths.push_back(std::move(path));
      report_.source.push_back(first.contour);
    }
    return {};
  }

  Contour pathOf(const Chain& chain) const {
    Contour path;
    path.closed = chain.closed;
    const auto& subs = chain.subPieces;
    for (std::size_t i = 0; i < subs.size();) {
      const SubPiece& first = trimmed_.subPieces[subs[i]];
      double to = first.to;
      std::size_t j = i + 1;
      while (j < subs.size() && trimmed_.subPieces[subs[j]].piece == first.piece &&
             trimmed_.subPieces[subs[j]].from == to)
        to = trimmed_.subPieces[subs[j++]].to;
      const RawPiece& piece = raw_.pieces[first.piece];
      const curve::Curve& c = piece.curve;
      const bool whole = first.from == c.first() && to == c.last();
      path.segments.push_back(
          {whole ? c : c.trimmed(first.from, to),
           piece.corner ? "corner" : contours_[piece.contour].segments[piece.segment].source});
      i = j;
    }
    return path;
  }

  Error refusal() const {
    const UncutPlace& place = report_.uncut.front();
    return {ErrorCode::infeasible,
            fmt::format(
                "{}: a tool of {:.4g} mm does not reach {} place{}, the first at s {:.3f} mm (x {:.3f}, y "
                "{:.3f}); use a smaller tool or let it leave material there",
                contours_[place.contour].name, 2.0 * options_.radius, report_.uncut.size(),
                report_.uncut.size() == 1 ? "" : "s", place.from, place.point.x, place.point.y)};
  }

  const OffsetOptions& options_;
  std::vector<Contour> contours_;
  RawOffset raw_;
  Trimmed trimmed_;
  OffsetReport report_;
};

}  // namespace

Result<void> OffsetOptions::validate() const {
  if (!std::isfinite(radius) || !(radius > 0.0))
    return invalid(fmt::format("the tool's radius must be a positive number of mm, not {}", radius));
  if (!std::isfinite(curveTolerance) || !(curveTolerance > 0.0))
    return invalid(fmt::format("the tolerance of offset curves must be positive, not {}", curveTolerance));
  return {};
}

Result<OffsetReport> offsetContours(const std::vector<Contour>& contours, const OffsetOptions& options,
                                    RunControl& control) {
  if (auto valid = options.validate(); !valid) return valid.error();
  if (contours.empty()) return invalid("there is no contour to offset");
  for (const Contour& contour : contours) {
    if (contour.segments.empty())
      return invalid("the contour " + contour.name + " is empty; choose another one");
  }
  // Where three pieces meet within rounding, or two run together, a path wider by less than the check can see
  // has plain crossings.
  auto report = Offsetter(contours, options).run(0.0, control);
  for (double wider : {3e-8, 2e-7, 8e-7}) {
    if (report.ok() || report.error().code != ErrorCode::notConverged) break;
    report = Offsetter(contours, options).run(wider, control);
  }
  return report;
}

}  // namespace kf::construct
