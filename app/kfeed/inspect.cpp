// kfeed inspect: contours, joints and tight spots of a drawing; geometry only.
// Lengths in mm, angles in degrees.
#include <algorithm>
#include <cstdio>

#include <fmt/format.h>

#include "app/kfeed/verbs.h"

namespace kf::kfeed {
namespace {

void print(const pipeline::OpenedDrawing& drawing, const pipeline::SummaryInput& input) {
  fmt::print("{}: {}, drawn in {}, {} contour{}, {:.3f} x {:.3f} mm\n", drawing.name, drawing.format,
             drawing.units, drawing.contours.size(), drawing.contours.size() == 1 ? "" : "s",
             drawing.bounds.width(), drawing.bounds.height());
  for (std::size_t i = 0; i < input.facts.size(); ++i) {
    const pipeline::ContourFacts& facts = input.facts[i];
    const auto breaks = std::count_if(facts.joints.begin(), facts.joints.end(), [](const contour::Joint& j) {
      return j.kind == contour::JointKind::tangentBreak;
    });
    const auto steps = static_cast<std::ptrdiff_t>(facts.joints.size()) - breaks;
    fmt::print(
        "\n{}  {}  {}, length {:.3f} mm, tightest radius {} mm, {} tangent break{}, {} curvature step{}\n",
        facts.number, facts.name, facts.closed ? "closed" : "open", facts.length, radiusText(facts.minRadius),
        breaks, breaks == 1 ? "" : "s", steps, steps == 1 ? "" : "s");
    if (input.spots[i].empty()) continue;
    fmt::print("{:>14} {:>12} {:>12} {:>12}\n", "s mm", "x mm", "y mm", "radius mm");
    const std::size_t shown = std::min<std::size_t>(input.spots[i].size(), 10);
    for (std::size_t j = 0; j < shown; ++j) {
      const pipeline::TightSpot& spot = input.spots[i][j];
      fmt::print("{:14.3f} {:12.3f} {:12.3f} {:>12}\n", spot.s, spot.x, spot.y, radiusText(spot.radius));
    }
    if (shown < input.spots[i].size())
      fmt::print("{:>14} and {} more; --json lists them\n", "", input.spots[i].size() - shown);
  }
}

int inspectOne(const std::string& path, const Request& request, RunControl& control) {
  auto drawing = pipeline::openDrawing(path, openOptions(request), control);
  if (!drawing) return fail(drawing.error());
  for (const std::string& warning : drawing->warnings) warn(request, drawing->name + ": " + warning);
  auto prepared = prepareChosen(*drawing, request, nullptr, {}, control);
  if (!prepared) return fail(prepared.error());
  pipeline::SummaryInput input;
  input.drawing = &*drawing;
  for (const pipeline::PreparedContour& one : *prepared) {
    input.facts.push_back(one.facts);
    input.spots.push_back(pipeline::geometricTightSpots(*one.path));
  }
  if (request.json) {
    fmt::print("{}", pipeline::summaryJson(input));
  } else if (!request.quiet) {
    print(*drawing, input);
  }
  return kDone;
}

}  // namespace

int inspect(const Request& request, RunControl& control) {
  int worst = kDone;
  for (const std::string& path : request.drawings) {
    const int code = inspectOne(path, request, control);
    if (code == kInterrupted) return code;
    worst = std::max(worst, code);
  }
  return worst;
}

}  // namespace kf::kfeed
