// Runs of short segments replaced by what they stand for.
// Lengths in mm, angles in rad.
#include "core/construct/fit.h"

#include <algorithm>
#include <cmath>

#include <fmt/format.h>

#include "core/construct/fit_run.h"
#include "core/curve/arc_length.h"

namespace kf::construct {
namespace {

using contour::Contour;
using curve::Vec2;

constexpr double kSweptArc = 0.35;  // rad; an arc that sweeps more is one on purpose

Error invalid(std::string message) {
  return {ErrorCode::invalidArgument, std::move(message)};
}

class RunFinder {
 public:
  RunFinder(const Contour& contour, const FitOptions& options) : contour_(contour), options_(options) {}

  Result<FitReport> run(RunControl& control) {
    measure();
    report_.fitted = contour_;
    report_.fitted.segments.clear();
    const std::size_t n = contour_.segments.size();
    // A closed contour is walked from the first segment that ends a run, so that no run wraps around.
    std::size_t first = 0;
    if (contour_.closed) {
      while (first < n && isShort_[first] != 0) ++first;
      if (first == n) first = 0;
    }
    for (std::size_t done = 0; done < n;) {
      if (control.isCancelled()) return Error{ErrorCode::cancelled, "cancelled"};
      const std::size_t at = (first + done) % n;
      std::size_t count = 0;
      while (done + count < n && isShort_[(first + done + count) % n] != 0) ++count;
      if (count >= options_.leastPieces) {
        replace(at, count);
        done += count;
      } else {
        for (std::size_t i = 0; i < std::max<std::size_t>(count, 1); ++i)
          report_.fitted.segments.push_back(contour_.segments[(at + i) % n]);
        done += std::max<std::size_t>(count, 1);
      }
      control.report(static_cast<double>(done) / static_cast<double>(n));
    }
    return std::move(report_);
  }

 private:
  void measure() {
    std::vector<double> plain;
    double s = 0.0;
    for (const contour::Segment& segment : contour_.segments) {
      const double length = curve::totalLength(segment.curve);
      starts_.push_back(s);
      s += length;
      lengths_.push_back(length);
      if (isPlain(segment.curve)) plain.push_back(length);
    }
    double longest = options_.longestPiece;
    if (!(longest > 0.0) && !plain.empty()) {
      const auto middle = plain.begin() + static_cast<std::ptrdiff_t>(plain.size() / 2);
      std::nth_element(plain.begin(), middle, plain.end());
      longest = 6.0 * *middle;
    }
    for (std::size_t i = 0; i < lengths_.size(); ++i) {
      isShort_.push_back(
          isPlain(contour_.segments[i].curve) && lengths_[i] > 0.0 && lengths_[i] <= longest ? 1 : 0);
    }
  }

  static bool isPlain(const curve::Curve& c) {
    return c.asLine() != nullptr || (c.asArc() != nullptr && std::abs(c.asArc()->sweep) <= kSweptArc);
  }

  void replace(std::size_t first, std::size_t count) {
    const std::size_t n = contour_.segments.size();
    RunPoints points = samplePieces(contour_, first, count, options_.tolerance);
    if (!points.closed) {
      if (first > 0 || contour_.closed) points.before = smoothNeighbour((first + n - 1) % n, false, points);
      if (first + count < n || contour_.closed)
        points.after = smoothNeighbour((first + count) % n, true, points);
    }
    FitRun run;
    run.from = starts_[first];
    run.to = starts_[(first + count - 1) % n] + lengths_[(first + count - 1) % n];
    run.pieces = count;
    fitRun(contour_, points, options_, report_.fitted.segments, run, report_.corners);
    report_.largestDeviation = std::max(report_.largestDeviation, run.deviation);
    report_.pieces += run.pieces;
    report_.lines += run.lines;
    report_.arcs += run.arcs;
    report_.splines += run.splines;
    report_.spans += run.spans;
    report_.kept += run.kept;
    report_.runs.push_back(run);
  }

  // The neighbour's end, when the run goes on from it (or into it) without a corner.
  std::optional<EndCondition> smoothNeighbour(std::size_t segment, bool after, const RunPoints& run) const {
    const curve::Curve& c = contour_.segments[segment].curve;
    const double u = after ? c.first() : c.last();
    const curve::Bend bend = curve::bend(c.jet(u, after ? curve::Side::right : curve::Side::left));
    if (!bend.regular) return std::nullopt;
    const Vec2 p = c.point(u);
    const auto& q = run.points;
    std::size_t i = after ? q.size() - 1 : 0;
    const double reach = 8.0 * options_.tolerance;
    while (curve::distance(p, q[i]) < reach && (after ? i > 0 : i + 1 < q.size())) after ? --i : ++i;
    const Vec2 along = after ? p - q[i] : q[i] - p;
    const double turn =
        std::abs(std::atan2(curve::cross(bend.tangent, along), curve::dot(bend.tangent, along)));
    if (turn > 0.5 * options_.cornerAngle) return std::nullopt;
    return EndCondition{p, true, bend.tangent, bend.k};
  }

  const Contour& contour_;
  const FitOptions& options_;
  std::vector<double> starts_, lengths_;
  std::vector<char> isShort_;
  FitReport report_;
};

}  // namespace

Result<void> FitOptions::validate() const {
  if (!std::isfinite(tolerance) || !(tolerance > 0.0))
    return invalid(fmt::format("the fitting tolerance must be a positive number of mm, not {}", tolerance));
  if (!(cornerAngle > 0.0) || !(cornerAngle < 3.15))
    return invalid(
        fmt::format("the corner angle must be between 0 and 180 degrees, not {} rad", cornerAngle));
  if (!std::isfinite(longestPiece) || longestPiece < 0.0)
    return invalid(fmt::format("the longest piece must be a length in mm or 0, not {}", longestPiece));
  return {};
}

Result<FitReport> fitRuns(const Contour& contour, const FitOptions& options, RunControl& control) {
  if (auto valid = options.validate(); !valid) return valid.error();
  if (contour.segments.empty())
    return invalid("the contour " + contour.name + " is empty; choose another one");
  return RunFinder(contour, options).run(control);
}

}  // namespace kf::construct
