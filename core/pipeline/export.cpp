// Files out: the point list and the summary.
// mm, s; feed in mm/min in files.
#include <cmath>
#include <limits>

#include <fmt/format.h>
#include <nlohmann/json.hpp>

#include "core/pipeline/pipeline.h"
#include "core/read/text.h"
#include "core/write/file_writer.h"
#include "core/write/point_list.h"

namespace kf::pipeline {
namespace {

using Json = nlohmann::ordered_json;

write::Sampling samplingFor(Sampling sampling) {
  switch (sampling) {
    case Sampling::chord:
      return write::Sampling::chord;
    case Sampling::length:
      return write::Sampling::length;
    case Sampling::time:
      break;
  }
  return write::Sampling::time;
}

std::string_view lawText(plan::Law law) {
  return law == plan::Law::jerk ? "jerk" : "acceleration";
}

// Infinity (a straight) is null in JSON.
Json finite(double value) {
  return std::isfinite(value) ? Json(value) : Json(nullptr);
}

Json jointsJson(const std::vector<contour::Joint>& joints) {
  Json list = Json::array();
  for (const contour::Joint& joint : joints) {
    list.push_back(
        {{"s_mm", joint.s},
         {"x_mm", joint.point.x},
         {"y_mm", joint.point.y},
         {"kind", joint.kind == contour::JointKind::tangentBreak ? "tangent-break" : "curvature-step"},
         {"turn_deg", joint.turn * 57.295779513082321},
         {"curvature_change_per_mm", joint.curvatureChange}});
  }
  return list;
}

Json spotsJson(const std::vector<TightSpot>& spots, bool planned) {
  Json list = Json::array();
  for (const TightSpot& spot : spots) {
    Json row = {{"s_mm", spot.s}, {"x_mm", spot.x}, {"y_mm", spot.y}, {"radius_mm", finite(spot.radius)}};
    if (planned) {
      row["speed_mm_per_min"] = spot.speed * 60.0;
      row["time_lost_s"] = spot.timeLost;
      row["limited_by"] = toText(spot.limitedBy);
    }
    list.push_back(std::move(row));
  }
  return list;
}

Json factsJson(const ContourFacts& facts) {
  return {{"number", facts.number},
          {"name", facts.name},
          {"closed", facts.closed},
          {"length_mm", facts.length},
          {"min_radius_mm", finite(facts.minRadius)},
          {"max_curvature_per_mm", facts.maxCurvature}};
}

std::string_view toText(construct::Treatment treatment) {
  switch (treatment) {
    case construct::Treatment::blended:
      return "blended";
    case construct::Treatment::stopped:
      return "kept";
    case construct::Treatment::smooth:
      break;
  }
  return "smooth";
}

// What became of the wanted path; places are on the wanted path.
Json driveJson(const DriveReport& drive) {
  Json joints = Json::array();
  for (const construct::JointReport& made : drive.joints) {
    if (made.treatment == construct::Treatment::smooth) continue;
    joints.push_back({{"s_mm", made.joint.s},
                      {"x_mm", made.joint.point.x},
                      {"y_mm", made.joint.point.y},
                      {"treatment", toText(made.treatment)},
                      {"deviation_mm", made.deviation},
                      {"length_mm", made.length},
                      {"short_neighbour", made.crowded}});
  }
  Json uncut = Json::array();
  for (const construct::UncutPlace& place : drive.uncut) {
    uncut.push_back({{"from_s_mm", place.from},
                     {"to_s_mm", place.to},
                     {"x_mm", place.point.x},
                     {"y_mm", place.point.y},
                     {"radius_mm", finite(place.radius)},
                     {"depth_mm", finite(place.depth)},
                     {"area_mm2", place.area ? Json(*place.area) : Json(nullptr)}});
  }
  Json fits = Json::array();
  for (const construct::FitRun& run : drive.fits) {
    fits.push_back({{"from_s_mm", run.from},
                    {"to_s_mm", run.to},
                    {"pieces", run.pieces},
                    {"lines", run.lines},
                    {"arcs", run.arcs},
                    {"splines", run.splines},
                    {"spans", run.spans},
                    {"stretches_kept", run.kept},
                    {"deviation_mm", run.deviation}});
  }
  return {{"fits", std::move(fits)},
          {"uncut", std::move(uncut)},
          {"joints_blended", drive.blended},
          {"joints_kept", drive.stopped},
          {"largest_deviation_mm", drive.largestDeviation},
          {"joints", std::move(joints)}};
}

Json plannedJson(const PlannedContour& planned) {
  Json row = factsJson(planned.facts);
  row["law"] = lawText(planned.law);
  row["time_s"] = planned.plan.time;
  row["time_lower_bound_s"] = planned.plan.lowerBound;
  row["mean_feed_mm_per_min"] = planned.meanFeed * 60.0;
  row["joints"] = jointsJson(planned.facts.joints);
  row["tight_spots"] = spotsJson(planned.tightSpots, true);
  Json byLimit = Json::object();
  for (LimitName name : allLimitNames()) {
    const double time = planned.plan.timeByLimit[static_cast<std::size_t>(name)];
    if (time > 0.0) byLimit[std::string(toText(name))] = time;
  }
  row["time_by_limit_s"] = std::move(byLimit);
  Json prices = Json::array();
  for (const plan::Price& price : planned.prices) {
    prices.push_back({{"limit", toText(price.limit)},
                      {"change_percent", price.changePercent},
                      {"time_saved_s", price.timeSaved}});
  }
  row["sensitivity"] = std::move(prices);
  Json low = Json::array();
  for (const plan::LowSpeedStretch& stretch : planned.lowSpeed) {
    low.push_back({{"from_s_mm", stretch.from},
                   {"to_s_mm", stretch.to},
                   {"time_s", stretch.time},
                   {"slowest_mm_per_min", stretch.slowest * 60.0},
                   {"limited_by", toText(stretch.limitedBy)}});
  }
  row["below_lowest_feed"] = std::move(low);
  if (planned.drive) row["driven"] = driveJson(*planned.drive);
  return row;
}

Json leftOutJson(const std::vector<read::Skipped>& list) {
  Json rows = Json::array();
  for (const read::Skipped& row : list) {
    rows.push_back(
        {{"kind", row.kind}, {"reason", row.reason}, {"count", row.count}, {"first_place", row.firstPlace}});
  }
  return rows;
}

}  // namespace

Result<std::string> pointListFor(const OpenedDrawing& drawing, const std::vector<PlannedContour>& contours,
                                 const limits::Limits& limits, const PointListRequest& request,
                                 RunControl& control) {
  write::PointListHead head;
  head.source = drawing.name;
  head.sourceSha256 = drawing.sha256;
  head.limits = limits.name + (limits.example ? " (an example, not a real machine's)" : "");
  if (!contours.empty()) head.law = lawText(contours.front().law);
  for (const limits::Field& field : limits::fields()) {
    if (const auto value = field.get(limits))
      head.limitValues.push_back(fmt::format("{}={}", field.name, *value));
  }
  head.version = KAPPAFEED_VERSION;
  head.sampling = samplingFor(request.sampling);
  head.step = request.step;
  std::vector<write::PointListContour> list;
  for (const PlannedContour& planned : contours) {
    write::PointListContour entry;
    entry.number = planned.facts.number;
    entry.name = planned.facts.name;
    entry.closed = planned.facts.closed;
    entry.schedule = &planned.plan.schedule;
    for (const contour::Joint& joint : planned.facts.joints) {
      if (joint.kind == contour::JointKind::tangentBreak && joint.s < planned.facts.length)
        entry.corners.push_back(joint.s);
    }
    entry.at = [path = planned.path, hint = std::size_t{0}](double s) mutable {
      const path::Sample sample = path->sample(s, hint);
      return write::PathPoint{sample.x, sample.y, sample.k};
    };
    list.push_back(std::move(entry));
  }
  return write::pointListText(head, list, control);
}

Result<void> exportPoints(const OpenedDrawing& drawing, const std::vector<PlannedContour>& contours,
                          const limits::Limits& limits, const PointListRequest& request,
                          RunControl& control) {
  auto text = pointListFor(drawing, contours, limits, request, control);
  if (!text) return text.error();
  return write::writeFile(request.outputPath, *text, request.force);
}

std::string summaryJson(const SummaryInput& input) {
  Json json;
  json["format"] = "kappafeed-summary";
  json["version"] = 1;
  json["program_version"] = KAPPAFEED_VERSION;
  json["drawing"] = input.drawing->path;
  json["drawing_sha256"] = input.drawing->sha256;
  json["drawing_format"] = input.drawing->format;
  json["units"] = input.drawing->units;
  Json contours = Json::array();
  if (input.plans != nullptr) {
    double total = 0.0;
    for (const PlannedContour& planned : *input.plans) {
      contours.push_back(plannedJson(planned));
      total += planned.plan.time;
    }
    json["contours"] = std::move(contours);
    json["total_time_s"] = total;
    if (input.limits != nullptr) {
      const JobTime job = jobTime(*input.plans, *input.limits);
      json["rapid_time_s"] = job.rapid;
      json["entry_time_s"] = job.entry;
      json["job_time_s"] = job.total();
    }
  } else {
    for (std::size_t i = 0; i < input.facts.size(); ++i) {
      Json row = factsJson(input.facts[i]);
      row["joints"] = jointsJson(input.facts[i].joints);
      row["tight_spots"] = spotsJson(input.spots[i], false);
      contours.push_back(std::move(row));
    }
    json["contours"] = std::move(contours);
  }
  json["skipped"] = leftOutJson(input.drawing->skipped);
  json["ignored"] = leftOutJson(input.drawing->ignored);
  json["warnings"] = input.drawing->warnings;
  return json.dump(2, ' ', false, Json::error_handler_t::replace) + "\n";
}

}  // namespace kf::pipeline
