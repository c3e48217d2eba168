// kfeed plan: plans the chosen contours of drawings and writes what is asked for.
// mm, s; feed in mm/min.
#include <algorithm>
#include <cstdio>
#include <filesystem>

#include <fmt/format.h>

#include "app/kfeed/verbs.h"
#include "core/limits/limits.h"
#include "core/write/file_writer.h"

namespace kf::kfeed {
namespace {

void printShares(const plan::Plan& plan) {
  std::vector<std::pair<double, LimitName>> shares;
  for (LimitName name : allLimitNames()) {
    const double time = plan.timeByLimit[static_cast<std::size_t>(name)];
    if (time > 0.0) shares.emplace_back(time, name);
  }
  std::stable_sort(shares.begin(), shares.end(),
                   [](const auto& a, const auto& b) { return a.first > b.first; });
  fmt::print("   where the time goes:");
  for (std::size_t i = 0; i < shares.size(); ++i)
    fmt::print("{} {} {:.3f} s", i == 0 ? "" : ",", toText(shares[i].second), shares[i].first);
  fmt::print("\n");
}

void printPrices(const std::vector<plan::Price>& prices) {
  fmt::print("   +10 % of a limit would save:");
  bool any = false;
  for (const plan::Price& price : prices) {
    if (price.timeSaved < 5e-4) continue;
    fmt::print("{} {} {:.3f} s", any ? "," : "", toText(price.limit), price.timeSaved);
    any = true;
  }
  fmt::print("{}\n", any ? "" : " nothing");
}

void printDrive(const pipeline::DriveReport& drive) {
  if (!drive.uncut.empty()) {
    const auto deepest = std::max_element(
        drive.uncut.begin(), drive.uncut.end(),
        [](const construct::UncutPlace& a, const construct::UncutPlace& b) { return a.depth < b.depth; });
    fmt::print("   the tool does not reach {} place{}; the deepest, {:.3f} mm, at x {:.3f}, y {:.3f}\n",
               drive.uncut.size(), drive.uncut.size() == 1 ? "" : "s", deepest->depth, deepest->point.x,
               deepest->point.y);
  }
  if (drive.blended + drive.stopped == 0) return;
  fmt::print("   joints: {} blended, at most {:.4f} mm off the wanted path, {} kept", drive.blended,
             drive.largestDeviation, drive.stopped);
  if (drive.crowded > 0) fmt::print("; {} have short neighbours that set their size", drive.crowded);
  fmt::print("\n");
}

void print(const pipeline::OpenedDrawing& drawing, const std::vector<pipeline::PlannedContour>& plans) {
  double total = 0.0;
  for (const pipeline::PlannedContour& planned : plans) {
    const plan::Plan& p = planned.plan;
    total += p.time;
    fmt::print("{}  {}  {:.3f} mm in {:.3f} s (no plan beats {:.3f} s), mean feed {:.0f} mm/min\n",
               planned.facts.number, planned.facts.name, planned.facts.length, p.time, p.lowerBound,
               planned.meanFeed * 60.0);
    if (planned.drive) printDrive(*planned.drive);
    printShares(p);
    printPrices(planned.prices);
    if (planned.tightSpots.empty()) continue;
    fmt::print("   {:>12} {:>11} {:>11} {:>11} {:>12} {:>9}  {}\n", "s mm", "x mm", "y mm", "radius mm",
               "feed mm/min", "lost s", "limited by");
    for (std::size_t j = 0; j < std::min<std::size_t>(planned.tightSpots.size(), 5); ++j) {
      const pipeline::TightSpot& spot = planned.tightSpots[j];
      fmt::print("   {:12.3f} {:11.3f} {:11.3f} {:>11} {:12.0f} {:9.3f}  {}\n", spot.s, spot.x, spot.y,
                 radiusText(spot.radius), spot.speed * 60.0, spot.timeLost, toText(spot.limitedBy));
    }
  }
  fmt::print("{}: {} contour{} in {:.3f} s\n", drawing.name, plans.size(), plans.size() == 1 ? "" : "s",
             total);
}

// Where an output of a batch goes: the folder, with the drawing's name and the ending that the option gives.
std::string outputPath(const std::string& asked, const std::string& drawing, const Request& request) {
  if (request.outputFolder.empty() || asked == "-") return asked;
  const std::string name = std::filesystem::path(drawing).stem().string() + asked;
  return (std::filesystem::path(request.outputFolder) / name).string();
}

pipeline::PlanOptions planOptions(const Request& request) {
  pipeline::PlanOptions options;
  if (!request.law.empty()) options.law = request.law == "jerk" ? plan::Law::jerk : plan::Law::acceleration;
  options.joints = request.joints == "exact" ? plan::Joints::exact : plan::Joints::blend;
  options.refuseUncut = request.uncut == "refuse";
  options.targetNodes = static_cast<std::size_t>(request.nodes);
  return options;
}

pipeline::PointListRequest listRequest(const Request& request, const std::string& path) {
  pipeline::PointListRequest list;
  list.outputPath = outputPath(request.points, path, request);
  list.force = request.force;
  list.sampling = request.sampling == "chord"    ? pipeline::Sampling::chord
                  : request.sampling == "length" ? pipeline::Sampling::length
                                                 : pipeline::Sampling::time;
  const double usual = list.sampling == pipeline::Sampling::chord    ? 0.005
                       : list.sampling == pipeline::Sampling::length ? 0.5
                                                                     : 0.001;
  list.step = request.step.value_or(usual);
  return list;
}

Result<void> writeOutputs(const pipeline::OpenedDrawing& drawing,
                          const std::vector<pipeline::PlannedContour>& plans, const limits::Limits& limits,
                          const Request& request, const std::string& path, RunControl& control) {
  if (!request.points.empty()) {
    if (auto done = pipeline::exportPoints(drawing, plans, limits, listRequest(request, path), control);
        !done)
      return done;
  }
  pipeline::SummaryInput input;
  input.drawing = &drawing;
  input.plans = &plans;
  if (request.json) fmt::print("{}", pipeline::summaryJson(input));
  if (request.summary.empty()) return {};
  return write::writeFile(outputPath(request.summary, path, request), pipeline::summaryJson(input),
                          request.force);
}

int planOne(const std::string& path, const Request& request, const limits::Limits& limits,
            RunControl& control) {
  auto drawing = pipeline::openDrawing(path, openOptions(request), control);
  if (!drawing) return fail(drawing.error());
  for (const std::string& warning : drawing->warnings) warn(request, drawing->name + ": " + warning);
  const pipeline::PlanOptions options = planOptions(request);
  auto prepared = prepareChosen(*drawing, request, &limits, options, control);
  if (!prepared) return fail(prepared.error());
  std::vector<pipeline::PlannedContour> plans;
  for (const pipeline::PreparedContour& one : *prepared) {
    auto planned = pipeline::planContour(one, limits, options, true, control);
    if (!planned) return fail({planned.error().code, drawing->name + ": " + planned.error().message});
    plans.push_back(std::move(*planned));
  }
  if (auto written = writeOutputs(*drawing, plans, limits, request, path, control); !written)
    return fail(written.error());
  const bool toStdout = request.points == "-" || request.summary == "-";
  if (!request.json && !request.quiet && !toStdout) print(*drawing, plans);
  return kDone;
}

}  // namespace

int plan(const Request& request, RunControl& control) {
  auto limits = limits::readLimitsFile(request.limitsFile);
  if (!limits) return fail(limits.error());
  for (const std::string& assignment : request.assignments) {
    if (auto done = limits::set(*limits, assignment); !done) return fail(done.error());
  }
  if (auto valid = limits::validateForPlan(*limits); !valid) {
    return fail({ErrorCode::invalidArgument, request.limitsFile + ": " + valid.error().message});
  }
  if (limits->example)
    warn(request, request.limitsFile + " is an example; enter your own machine's limits before you cut");
  int worst = kDone;
  for (const std::string& path : request.drawings) {
    const int code = planOne(path, request, *limits, control);
    if (code == kInterrupted) return code;
    worst = std::max(worst, code);
  }
  return worst;
}

}  // namespace kf::kfeed
