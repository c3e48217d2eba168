// From the drawing's contour to the paths that are driven: offset for the tool, joints blended.
// Lengths in mm.
#include <algorithm>
#include <cmath>

#include <fmt/format.h>

#include "core/pipeline/pipeline.h"
#include "core/plan/moves.h"

namespace kf::pipeline {
namespace {

using contour::Contour;

// The wanted paths: the contour itself, or the tool's centre beside it.
Result<std::vector<Contour>> wantedPaths(const Contour& contour, const limits::Limits& limits,
                                         const PlanOptions& options,
                                         std::vector<construct::UncutPlace>& uncut, RunControl& control) {
  if (limits.side == limits::Side::on) return std::vector<Contour>{contour};
  if (!limits.toolDiameter) {
    return Error{ErrorCode::invalidArgument,
                 fmt::format("tool.side is {} but tool.diameter_mm is missing; give the diameter, or set "
                             "tool.side to on",
                             limits::toText(limits.side))};
  }
  construct::OffsetOptions offsetting;
  offsetting.radius = 0.5 * *limits.toolDiameter;
  offsetting.side =
      limits.side == limits::Side::left ? construct::ToolSide::left : construct::ToolSide::right;
  offsetting.uncut = options.refuseUncut ? construct::UncutPolicy::refuse : construct::UncutPolicy::trim;
  auto report = construct::offsetContours({contour}, offsetting, control);
  if (!report) return report.error();
  if (report->paths.empty()) {
    return Error{ErrorCode::infeasible,
                 fmt::format("{}: a tool of {:.4g} mm fits nowhere on its {} side; use a smaller tool or the "
                             "other side",
                             contour.name, *limits.toolDiameter, limits::toText(limits.side))};
  }
  uncut = std::move(report->uncut);
  return std::move(report->paths);
}

Result<Contour> blended(const Contour& wanted, double tolerance,
                        const std::vector<construct::JointChoice>& choices, DriveReport& report,
                        RunControl& control) {
  construct::BlendOptions blending;
  blending.tolerance = tolerance;
  blending.byHand = choices;
  auto made = construct::blendJoints(wanted, blending, control);
  if (!made) return made.error();
  report.joints = std::move(made->joints);
  report.largestDeviation = made->largestDeviation;
  report.blended = made->blended;
  report.stopped = made->stopped;
  report.crowded = made->crowded;
  return std::move(made->driven);
}

Result<PreparedContour> prepareOne(const Contour& wanted, int number, const limits::Limits& limits,
                                   const PlanOptions& options, DriveReport report, RunControl& control) {
  Contour driven = wanted;
  if (options.joints == plan::Joints::blend && limits.pathTolerance) {
    const auto chosen = options.jointChoices.find(number);
    const std::vector<construct::JointChoice> none;
    auto made = blended(wanted, *limits.pathTolerance,
                        chosen == options.jointChoices.end() ? none : chosen->second, report, control);
    if (!made) return made.error();
    driven = std::move(*made);
  }
  PlanOptions placing = options;
  placing.law = lawFor(limits, options);
  auto prepared = prepareContour(driven, number, placing, control);
  if (!prepared) return prepared.error();
  report.wanted = std::make_shared<const Contour>(wanted);
  prepared->drive = std::make_shared<const DriveReport>(std::move(report));
  return prepared;
}

}  // namespace

Result<std::vector<PreparedContour>> prepareDriven(const Contour& contour, int number,
                                                   const limits::Limits& limits, const PlanOptions& options,
                                                   RunControl& control) {
  DriveReport report;
  Contour fitted = contour;
  if (options.fitTolerance) {
    construct::FitOptions fitting;
    fitting.tolerance = *options.fitTolerance;
    auto made = construct::fitRuns(contour, fitting, control);
    if (!made) return made.error();
    fitted = std::move(made->fitted);
    report.fits = std::move(made->runs);
    report.fitCorners = made->corners;
  }
  auto wanted = wantedPaths(fitted, limits, options, report.uncut, control);
  if (!wanted) return wanted.error();
  std::vector<PreparedContour> all;
  for (const Contour& path : *wanted) {
    auto prepared = prepareOne(path, number, limits, options, report, control);
    if (!prepared) return prepared.error();
    all.push_back(std::move(*prepared));
    report.uncut.clear();  // told once, with the first path
    report.fits.clear();
  }
  return all;
}

JobTime jobTime(const std::vector<PlannedContour>& contours, const limits::Limits& limits) {
  JobTime time;
  for (std::size_t i = 0; i < contours.size(); ++i) {
    time.cutting += contours[i].plan.time;
    time.entry += plan::entryTime(limits);
    if (i == 0) continue;
    const path::Path &from = *contours[i - 1].path, &to = *contours[i].path;
    time.rapid += plan::rapidTime(to.x.front() - from.x.back(), to.y.front() - from.y.back(), limits);
  }
  return time;
}

void numberParts(std::vector<PreparedContour>& all, int drawn) {
  int seen = 0, last = drawn;
  for (PreparedContour& one : all) {
    if (one.facts.number == seen) {
      one.facts.number = ++last;
    } else {
      seen = one.facts.number;
    }
  }
}

}  // namespace kf::pipeline
