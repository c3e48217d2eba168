// The one entry for the window and the command line: drawing -> contours -> path -> plan -> tight spots ->
// files. mm, s.
#pragma once

#include <map>
#include <memory>
#include <optional>
#include <string>
#include <vector>

#include "core/base/result.h"
#include "core/base/run_control.h"
#include "core/construct/blend.h"
#include "core/construct/fit.h"
#include "core/construct/offset.h"
#include "core/contour/contour.h"
#include "core/limits/limits.h"
#include "core/path/path.h"
#include "core/plan/low_speed.h"
#include "core/plan/plan.h"
#include "core/read/drawing.h"

namespace kf::pipeline {

struct OpenOptions {
  std::optional<double>
      millimetresPerUnit;  // for a drawing that does not say; it does not override one that does
  bool allowSkipped = false;
  double chainTolerance = 0.01;  // mm
  std::vector<std::string> layers;
};

// A drawing, read, scaled to mm and chained. Shared and immutable.
struct OpenedDrawing {
  std::string path;  // as given
  std::string name;  // file name
  std::string format;
  std::string units;   // the drawing's own
  std::string sha256;  // of the file's bytes, hex
  std::vector<contour::Contour> contours;
  std::vector<read::Skipped> skipped, ignored;
  std::vector<std::string> warnings;
  curve::Box bounds;
};

// Fails  as read::readDrawing; also unsupported: unit unknown and not given; entities that can't be used
// without
//        allowSkipped (their count and kinds are named).
Result<OpenedDrawing> openDrawing(const std::string& path, const OpenOptions& options, RunControl& control);

struct PlanOptions {
  std::optional<plan::Law> law;  // empty: jerk where a jerk limit is given, else acceleration
  plan::Joints joints = plan::Joints::blend;
  std::map<int, std::vector<construct::JointChoice>> jointChoices;  // made by hand, by contour number
  std::optional<double> fitTolerance;  // mm; runs of short segments are fitted within it first
  bool refuseUncut = false;            // refuse a contour that the tool does not reach everywhere
  std::size_t targetNodes = 2000;
};

// The law that these options and limits ask for.
plan::Law lawFor(const limits::Limits& limits, const PlanOptions& options);

// A place where speed is lost against the programmed feed.
struct TightSpot {
  double s = 0.0, x = 0.0, y = 0.0;
  double radius = 0.0;          // mm; infinite on a straight, 0 at a tangent break
  double speed = 0.0;           // mm/s, the slowest there
  double timeLost = 0.0;        // s, against driving the same stretch at the programmed feed
  double from = 0.0, to = 0.0;  // the stretch, arc length
  LimitName limitedBy = LimitName::feed;
};

// Geometry of one contour: what inspect needs.
struct ContourFacts {
  int number = 0;  // 1-based
  std::string name;
  bool closed = false;
  double length = 0.0;
  double minRadius = 0.0;  // mm; infinite when there is no bend
  double maxCurvature = 0.0;
  std::vector<contour::Joint> joints;  // tangent breaks and curvature steps only
};

// What became of the drawing's contour on its way to the driven path.
struct DriveReport {
  std::shared_ptr<const contour::Contour> wanted;  // the path that was asked for: offset, before blending
  std::vector<construct::JointReport> joints;      // places on `wanted`; empty where joints are kept exactly
  double largestDeviation = 0.0;                   // mm, proved bound, driven against wanted
  std::size_t blended = 0, stopped = 0, crowded = 0;
  std::vector<construct::FitRun> fits;  // runs of short segments that were fitted, on the drawing's contour
  std::size_t fitCorners = 0;           // corners found in them
  std::vector<construct::UncutPlace> uncut;  // what the tool does not reach; places on the drawing's contour
};

struct PlannedContour {
  ContourFacts facts;
  std::shared_ptr<const path::Path> path;
  std::shared_ptr<const DriveReport> drive;  // null when the drawing's contour is driven as it is
  plan::Law law = plan::Law::acceleration;   // that it was planned by
  plan::Plan plan;
  double meanFeed = 0.0;                        // mm/s
  std::vector<TightSpot> tightSpots;            // worst first, by time lost
  std::vector<plan::Price> prices;              // largest first
  std::vector<plan::LowSpeedStretch> lowSpeed;  // below limits.lowerFeed, in order; empty without one
};

// Path and facts of one contour; independent of limits, so that a limit change can reuse it.
struct PreparedContour {
  ContourFacts facts;  // of the driven path
  std::shared_ptr<const path::Path> path;
  std::shared_ptr<const DriveReport> drive;  // null when the drawing's contour is driven as it is
};
Result<PreparedContour> prepareContour(const contour::Contour& contour, int number,
                                       const PlanOptions& options, RunControl& control);

// The paths that are driven for one contour of the drawing under these limits: offset by the tool's radius to
// tool.side (that may give several), joints blended within the path tolerance unless options.joints says
// exact or there is no tolerance. Fails  as construct::offsetContours and blendJoints; invalidArgument: a
// side without a diameter; infeasible: the
//        tool fits nowhere.
Result<std::vector<PreparedContour>> prepareDriven(const contour::Contour& contour, int number,
                                                   const limits::Limits& limits, const PlanOptions& options,
                                                   RunControl& control);

// Gives the second and later paths of one contour numbers of their own, after the `drawn` contours of the
// drawing.
void numberParts(std::vector<PreparedContour>& all, int drawn);

// Geometric tight spots (local curvature maxima and tangent breaks, tightest first) for inspect.
std::vector<TightSpot> geometricTightSpots(const path::Path& path);

// `withPrices` re-plans once for each limit.
Result<PlannedContour> planContour(const PreparedContour& prepared, const limits::Limits& limits,
                                   const PlanOptions& options, bool withPrices, RunControl& control);

// One exported row.
enum class Sampling { chord, time, length };

struct PointListRequest {
  std::string outputPath;
  Sampling sampling = Sampling::time;
  double step = 0.001;  // mm of chord error, s, or mm
  bool force = false;   // replace an existing file
};

// The point list's text, as exportPoints writes it.
Result<std::string> pointListFor(const OpenedDrawing& drawing, const std::vector<PlannedContour>& contours,
                                 const limits::Limits& limits, const PointListRequest& request,
                                 RunControl& control);

// Samples the plans, writes the point list whole or not at all, and reads it back.
// Fails  cannotWrite  the file exists and force is not set, or writing or comparing failed.
Result<void> exportPoints(const OpenedDrawing& drawing, const std::vector<PlannedContour>& contours,
                          const limits::Limits& limits, const PointListRequest& request, RunControl& control);

// Seconds of the whole job: cutting in the order given, rapid moves between the contours (rest to rest,
// straight), and plunging, piercing and withdrawing at each.
struct JobTime {
  double cutting = 0.0, rapid = 0.0, entry = 0.0;
  double total() const { return cutting + rapid + entry; }
};
JobTime jobTime(const std::vector<PlannedContour>& contours, const limits::Limits& limits);

// The summary document (format kappafeed-summary) as JSON text. `limits` null: inspect.
struct SummaryInput {
  const OpenedDrawing* drawing = nullptr;
  std::vector<ContourFacts> facts;                     // inspect
  std::vector<std::vector<TightSpot>> spots;           // inspect
  const std::vector<PlannedContour>* plans = nullptr;  // plan
  const limits::Limits* limits = nullptr;              // plan: for the moves between contours
};
std::string summaryJson(const SummaryInput& input);

}  // namespace kf::pipeline
