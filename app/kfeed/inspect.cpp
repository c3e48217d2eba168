// kfeed inspect: contours, joints and tight spots of a drawing; geometry only.
// Lengths in mm, angles in degrees.
#include <algorithm>

#include <fmt/format.h>

#include "app/kfeed/verbs.h"

namespace kf::kfeed {
namespace {

constexpr std::size_t kSpotsShown = 10;

void print(Answer& answer, const pipeline::OpenedDrawing& drawing, const pipeline::SummaryInput& input) {
  answer.print("{}: {}, drawn in {}, {}, {:.3f} x {:.3f} mm\n", drawing.name, drawing.format, drawing.units,
               counted(drawing.contours.size(), "contour"), drawing.bounds.width(), drawing.bounds.height());
  for (std::size_t i = 0; i < input.facts.size(); ++i) {
    const pipeline::ContourFacts& facts = input.facts[i];
    const auto breaks = static_cast<std::size_t>(
        std::count_if(facts.joints.begin(), facts.joints.end(),
                      [](const contour::Joint& j) { return j.kind == contour::JointKind::tangentBreak; }));
    answer.print("\n{}  {}  {}, length {:.3f} mm, tightest radius {} mm, {}, {}\n", facts.number, facts.name,
                 facts.closed ? "closed" : "open", facts.length, radiusText(facts.minRadius),
                 counted(breaks, "tangent break"), counted(facts.joints.size() - breaks, "curvature step"));
    const std::vector<pipeline::TightSpot>& spots = input.spots[i];
    if (spots.empty()) continue;
    answer.print("{:>14} {:>12} {:>12} {:>12}\n", "s mm", "x mm", "y mm", "radius mm");
    for (std::size_t j = 0; j < std::min(spots.size(), kSpotsShown); ++j) {
      answer.print("{:14.3f} {:12.3f} {:12.3f} {:>12}\n", spots[j].s, spots[j].x, spots[j].y,
                   radiusText(spots[j].radius));
    }
    if (spots.size() > kSpotsShown)
      answer.print("{:>14} and {} more; --json lists them\n", "", spots.size() - kSpotsShown);
  }
}

Answer inspectOne(const std::string& path, int threads, const Request& request, RunControl& control) {
  Answer answer;
  auto drawing = pipeline::openDrawing(path, openOptions(request), control);
  if (!drawing) return answer.fail(drawing.error()), answer;
  for (const std::string& warning : drawing->warnings) answer.warn(request, drawing->name + ": " + warning);
  auto prepared = prepareChosen(*drawing, request, threads, nullptr, {}, control);
  if (!prepared) return answer.fail(prepared.error()), answer;
  pipeline::SummaryInput input;
  input.drawing = &*drawing;
  for (const pipeline::PreparedContour& one : *prepared) {
    input.facts.push_back(one.facts);
    input.spots.push_back(pipeline::geometricTightSpots(*one.path));
  }
  if (request.json) {
    answer.out = pipeline::summaryJson(input);
  } else if (request.isBatch() && !request.quiet) {
    double length = 0.0;
    for (const pipeline::ContourFacts& facts : input.facts) length += facts.length;
    answer.print("{}: {}, {:.3f} mm, {:.3f} x {:.3f} mm\n", drawing->name,
                 counted(input.facts.size(), "contour"), length, drawing->bounds.width(),
                 drawing->bounds.height());
  } else if (!request.quiet) {
    print(answer, *drawing, input);
  }
  return answer;
}

}  // namespace

int inspect(const Request& request, RunControl& control) {
  return forEachDrawing(request, control, [&](const std::string& path, int threads) {
    return inspectOne(path, threads, request, control);
  });
}

}  // namespace kf::kfeed
