// From the drawing's contour to the path that is driven.
// Lengths in mm.
#include "core/pipeline/pipeline.h"

namespace kf::pipeline {
namespace {

Result<PreparedContour> prepareBlended(const contour::Contour& wanted, int number, double tolerance,
                                       const PlanOptions& options, RunControl& control) {
  construct::BlendOptions blending;
  blending.tolerance = tolerance;
  if (const auto chosen = options.jointChoices.find(number); chosen != options.jointChoices.end())
    blending.byHand = chosen->second;
  auto blended = construct::blendJoints(wanted, blending, control);
  if (!blended) return blended.error();
  auto prepared = prepareContour(blended->driven, number, options, control);
  if (!prepared) return prepared.error();
  DriveReport report;
  report.wanted = std::make_shared<const contour::Contour>(wanted);
  report.joints = std::move(blended->joints);
  report.largestDeviation = blended->largestDeviation;
  report.blended = blended->blended;
  report.stopped = blended->stopped;
  report.crowded = blended->crowded;
  prepared->drive = std::make_shared<const DriveReport>(std::move(report));
  return prepared;
}

}  // namespace

Result<std::vector<PreparedContour>> prepareDriven(const contour::Contour& contour, int number,
                                                   const limits::Limits& limits, const PlanOptions& options,
                                                   RunControl& control) {
  const bool blend = options.joints == plan::Joints::blend && limits.pathTolerance;
  auto prepared = blend ? prepareBlended(contour, number, *limits.pathTolerance, options, control)
                        : prepareContour(contour, number, options, control);
  if (!prepared) return prepared.error();
  std::vector<PreparedContour> all;
  all.push_back(std::move(*prepared));
  return all;
}

}  // namespace kf::pipeline
