// kfeed plan: plans the chosen contours of drawings and writes what is asked for.
// mm, s; feed in mm/min.
#include <algorithm>
#include <filesystem>
#include <set>

#include <fmt/format.h>

#include "app/kfeed/verbs.h"
#include "core/base/parallel.h"
#include "core/limits/limits.h"
#include "core/write/file_writer.h"

namespace kf::kfeed {
namespace {

constexpr std::size_t kSpotsShown = 5;

void printShares(Answer& answer, const plan::Plan& plan) {
  std::vector<std::pair<double, LimitName>> shares;
  for (LimitName name : allLimitNames()) {
    const double time = plan.timeByLimit[static_cast<std::size_t>(name)];
    if (time > 0.0) shares.emplace_back(time, name);
  }
  std::stable_sort(shares.begin(), shares.end(),
                   [](const auto& a, const auto& b) { return a.first > b.first; });
  answer.print("   where the time goes:");
  for (std::size_t i = 0; i < shares.size(); ++i)
    answer.print("{} {} {:.3f} s", i == 0 ? "" : ",", toText(shares[i].second), shares[i].first);
  answer.print("\n");
}

void printPrices(Answer& answer, const std::vector<plan::Price>& prices) {
  answer.print("   +10 % of a limit would save:");
  bool any = false;
  for (const plan::Price& price : prices) {
    if (price.timeSaved < 5e-4) continue;
    answer.print("{} {} {:.3f} s", any ? "," : "", toText(price.limit), price.timeSaved);
    any = true;
  }
  answer.print("{}\n", any ? "" : " nothing");
}

void printUncut(Answer& answer, const std::vector<construct::UncutPlace>& uncut) {
  if (uncut.empty()) return;
  const auto deepest = std::max_element(
      uncut.begin(), uncut.end(),
      [](const construct::UncutPlace& a, const construct::UncutPlace& b) { return a.depth < b.depth; });
  answer.print("   the tool does not reach {}; the deepest, {:.3f} mm, at x {:.3f}, y {:.3f}\n",
               counted(uncut.size(), "place"), deepest->depth, deepest->point.x, deepest->point.y);
}

void printFits(Answer& answer, const std::vector<construct::FitRun>& fits) {
  construct::FitRun all;
  for (const construct::FitRun& run : fits) {
    all.pieces += run.pieces;
    all.lines += run.lines;
    all.arcs += run.arcs;
    all.splines += run.splines;
    all.spans += run.spans;
    all.kept += run.kept;
    all.deviation = std::max(all.deviation, run.deviation);
  }
  if (fits.empty()) return;
  answer.print("   fit: {} became {}, {} and {} of {}, at most {:.4f} mm off", counted(all.pieces, "piece"),
               counted(all.lines, "line"), counted(all.arcs, "arc"), counted(all.splines, "spline"),
               counted(all.spans, "span"), all.deviation);
  if (all.kept > 0) answer.print("; {} kept as drawn", counted(all.kept, "place"));
  answer.print("\n");
}

void printLowSpeed(Answer& answer, const std::vector<plan::LowSpeedStretch>& low) {
  if (low.empty()) return;
  double length = 0.0, time = 0.0;
  for (const plan::LowSpeedStretch& stretch : low) {
    length += stretch.to - stretch.from;
    time += stretch.time;
  }
  answer.print("   below the lowest feed in {}: {:.3f} mm, {:.3f} s\n", counted(low.size(), "place"), length,
               time);
}

void printDrive(Answer& answer, const pipeline::DriveReport& drive) {
  printFits(answer, drive.fits);
  printUncut(answer, drive.uncut);
  if (drive.blended + drive.stopped == 0) return;
  answer.print("   joints: {} blended, at most {:.4f} mm off the wanted path, {} kept", drive.blended,
               drive.largestDeviation, drive.stopped);
  if (drive.crowded > 0) answer.print("; {} have short neighbours that set their size", drive.crowded);
  answer.print("\n");
}

void printSpots(Answer& answer, const std::vector<pipeline::TightSpot>& spots) {
  if (spots.empty()) return;
  answer.print("   {:>12} {:>11} {:>11} {:>11} {:>12} {:>9}  {}\n", "s mm", "x mm", "y mm", "radius mm",
               "feed mm/min", "lost s", "limited by");
  for (std::size_t j = 0; j < std::min(spots.size(), kSpotsShown); ++j) {
    const pipeline::TightSpot& spot = spots[j];
    answer.print("   {:12.3f} {:11.3f} {:11.3f} {:>11} {:12.0f} {:9.3f}  {}\n", spot.s, spot.x, spot.y,
                 radiusText(spot.radius), spot.speed * 60.0, spot.timeLost, toText(spot.limitedBy));
  }
  if (spots.size() > kSpotsShown)
    answer.print("   {:>12} and {} more; --json lists them\n", "", spots.size() - kSpotsShown);
}

// All of it, or in a batch one line.
void print(Answer& answer, const Request& request, const pipeline::OpenedDrawing& drawing,
           const std::vector<pipeline::PlannedContour>& plans) {
  double total = 0.0;
  for (const pipeline::PlannedContour& planned : plans) {
    const plan::Plan& p = planned.plan;
    total += p.time;
    if (request.isBatch()) continue;
    answer.print("{}  {}  {:.3f} mm in {:.3f} s (no plan beats {:.3f} s), mean feed {:.0f} mm/min\n",
                 planned.facts.number, planned.facts.name, planned.facts.length, p.time, p.lowerBound,
                 planned.meanFeed * 60.0);
    if (planned.drive) printDrive(answer, *planned.drive);
    printShares(answer, p);
    printPrices(answer, planned.prices);
    printLowSpeed(answer, planned.lowSpeed);
    printSpots(answer, planned.tightSpots);
  }
  answer.print("{}: {} in {:.3f} s\n", drawing.name, counted(plans.size(), "contour"), total);
}

// Where an output goes: with an output folder, there, under the drawing's name and the ending that the option
// gives.
std::string outputPath(const std::string& asked, const std::string& drawing, const Request& request) {
  if (asked.empty() || request.outputFolder.empty()) return asked;
  const std::string stem = drawing == "-" ? "drawing" : std::filesystem::path(drawing).stem().string();
  return (std::filesystem::path(request.outputFolder) / (stem + asked)).string();
}

Error usage(std::string message) {
  return {ErrorCode::invalidArgument, std::move(message)};
}

// Refuses what would replace an input, and outputs of one run that share a place.
Result<void> checkOutputs(const Request& request) {
  namespace fs = std::filesystem;
  std::set<std::string> taken;
  for (const std::string& drawing : request.drawings) {
    for (const std::string* asked : {&request.points, &request.summary}) {
      const std::string path = outputPath(*asked, drawing, request);
      if (path.empty() || path == "-") continue;
      std::error_code failure;
      for (const std::string& input : request.drawings) {
        if (fs::equivalent(path, input, failure))
          return usage(fmt::format("{} is a drawing of this run; name another output", path));
      }
      if (fs::equivalent(path, request.limitsFile, failure))
        return usage(fmt::format("{} is the limits file of this run; name another output", path));
      const bool stream = fs::exists(path, failure) && !fs::is_regular_file(path, failure);
      if (!stream && !taken.insert(fs::absolute(path, failure).lexically_normal().string()).second)
        return usage(fmt::format("two outputs of this run would be {}; give them different names", path));
    }
  }
  return {};
}

pipeline::PlanOptions planOptions(const Request& request) {
  pipeline::PlanOptions options;
  if (!request.law.empty()) options.law = request.law == "jerk" ? plan::Law::jerk : plan::Law::acceleration;
  options.joints = request.joints == "exact" ? plan::Joints::exact : plan::Joints::blend;
  options.fitTolerance = request.fit;
  options.refuseUncut = request.uncut == "refuse";
  options.targetNodes = static_cast<std::size_t>(request.nodes);
  return options;
}

pipeline::PointListRequest listRequest(const Request& request) {
  pipeline::PointListRequest list;
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

// All outputs of one drawing together, or none.
Result<void> writeOutputs(const pipeline::OpenedDrawing& drawing,
                          const std::vector<pipeline::PlannedContour>& plans, const limits::Limits& limits,
                          const Request& request, RunControl& control) {
  write::Outputs outputs;
  const std::string points = outputPath(request.points, drawing.path, request);
  const std::string summary = outputPath(request.summary, drawing.path, request);
  if (!points.empty()) {
    auto text = pipeline::pointListFor(drawing, plans, limits, listRequest(request), control);
    if (!text) return text.error();
    if (auto done = outputs.add(points, std::move(*text), request.force); !done) return done;
  }
  if (request.json || !summary.empty()) {
    pipeline::SummaryInput input;
    input.drawing = &drawing;
    input.plans = &plans;
    input.limits = &limits;
    const std::string text = pipeline::summaryJson(input);
    if (!summary.empty()) {
      if (auto done = outputs.add(summary, text, request.force); !done) return done;
    }
    if (request.json) {
      if (auto done = outputs.add("-", text, request.force); !done) return done;
    }
  }
  if (control.isCancelled()) return Error{ErrorCode::cancelled, drawing.name + ": stopped before its end"};
  return outputs.commit();
}

Result<std::vector<pipeline::PlannedContour>> planAll(const std::vector<pipeline::PreparedContour>& prepared,
                                                      const limits::Limits& limits,
                                                      const pipeline::PlanOptions& options, int threads,
                                                      const std::string& name, RunControl& control) {
  std::vector<std::optional<Result<pipeline::PlannedContour>>> parts(prepared.size());
  forEachIndex(parts.size(), threads, [&](std::size_t i) {
    parts[i] = pipeline::planContour(prepared[i], limits, options, true, control);
  });
  std::vector<pipeline::PlannedContour> plans;
  for (auto& part : parts) {
    if (!*part) return Error{part->error().code, name + ": " + part->error().message};
    plans.push_back(std::move(**part));
  }
  return plans;
}

Answer planOne(const std::string& path, int threads, const Request& request, const limits::Limits& limits,
               RunControl& control) {
  Answer answer;
  auto drawing = pipeline::openDrawing(path, openOptions(request), control);
  if (!drawing) return answer.fail(drawing.error()), answer;
  for (const std::string& warning : drawing->warnings) answer.warn(request, drawing->name + ": " + warning);
  const pipeline::PlanOptions options = planOptions(request);
  auto prepared = prepareChosen(*drawing, request, threads, &limits, options, control);
  if (!prepared) return answer.fail(prepared.error()), answer;
  auto plans = planAll(*prepared, limits, options, threads, drawing->name, control);
  if (!plans) return answer.fail(plans.error()), answer;
  if (auto written = writeOutputs(*drawing, *plans, limits, request, control); !written)
    return answer.fail(written.error()), answer;
  const bool toStdout = request.json || request.points == "-" || request.summary == "-";
  if (!request.quiet && !toStdout) print(answer, request, *drawing, *plans);
  return answer;
}

Result<limits::Limits> readLimits(const Request& request) {
  auto limits = limits::readLimitsFile(request.limitsFile);
  if (!limits) return limits;
  for (const std::string& assignment : request.assignments) {
    if (auto done = limits::set(*limits, assignment); !done) return done.error();
  }
  if (auto valid = limits::validateForPlan(*limits); !valid)
    return Error{ErrorCode::invalidArgument, request.limitsFile + ": " + valid.error().message};
  return limits;
}

}  // namespace

int plan(const Request& request, RunControl& control) {
  Answer first;
  if (auto outputs = checkOutputs(request); !outputs) first.fail(outputs.error());
  auto limits = first.code == kDone ? readLimits(request) : Result<limits::Limits>(limits::Limits{});
  if (!limits) first.fail(limits.error());
  if (first.code == kDone && limits->example)
    first.warn(request,
               request.limitsFile + " is an example; enter your own machine's limits before you cut");
  if (first.code == kDone && pipeline::lawFor(*limits, planOptions(request)) == plan::Law::acceleration &&
      (limits->x.jerk || limits->y.jerk || limits->tangentialJerk))
    first.warn(request, "the plan is by the acceleration law; the jerk limits are not used");
  say(first);
  if (first.code != kDone) return first.code;
  return forEachDrawing(request, control, [&](const std::string& path, int threads) {
    return planOne(path, threads, request, *limits, control);
  });
}

}  // namespace kf::kfeed
