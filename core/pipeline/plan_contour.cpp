// One contour: its path, its plan, and its tight spots.
// mm, s.
#include <algorithm>
#include <cmath>
#include <limits>

#include "core/pipeline/pipeline.h"

namespace kf::pipeline {
namespace {

constexpr double kInfinite = std::numeric_limits<double>::infinity();
constexpr std::size_t kMostSpots = 200;

double radiusOf(double k) {
  return k == 0.0 ? kInfinite : 1.0 / std::abs(k);
}

// Stretches of the path between which the planned speed recovers. A valley of v belongs to one spot until the
// speed on both sides has risen by a tenth of what is missing at its bottom.
struct Valley {
  std::size_t from, bottom, to;
};

std::vector<Valley> valleys(const std::vector<double>& v, double feed) {
  std::vector<Valley> list;
  const std::size_t n = v.size();
  std::size_t i = 0;
  while (i < n) {
    while (i < n && v[i] >= feed * (1.0 - 1e-6)) ++i;
    if (i == n) break;
    const std::size_t from = i;
    std::size_t bottom = i, crest = i;
    for (; i < n && v[i] < feed * (1.0 - 1e-6); ++i) {
      if (v[i] < v[bottom] && crest <= bottom) bottom = i;
      if (v[i] > v[crest] || crest < bottom) crest = i;
      const double rise = 0.1 * (feed - v[bottom]);
      // A new descent after a real rise begins a valley of its own, at the crest between the two.
      if (crest > bottom && v[crest] - v[bottom] > rise && v[crest] - v[i] > rise) break;
    }
    const std::size_t to = (i < n && v[i] < feed * (1.0 - 1e-6)) ? crest : std::min(i, n - 1);
    list.push_back({from, bottom, to});
    if (i < n && v[i] < feed * (1.0 - 1e-6)) i = crest + 1 > from ? std::max(crest, from + 1) : from + 1;
  }
  return list;
}

double timeBetween(const path::Path& path, const std::vector<double>& v, std::size_t from, std::size_t to) {
  double time = 0.0;
  for (std::size_t i = from; i < to; ++i) {
    const double h = path.s[i + 1] - path.s[i];
    if (h > 0.0 && v[i] + v[i + 1] > 0.0) time += 2.0 * h / (v[i] + v[i + 1]);
  }
  return time;
}

std::vector<TightSpot> spotsOf(const path::Path& path, const plan::Plan& plan, double feed) {
  std::vector<double> v(plan.q.size());
  std::transform(plan.q.begin(), plan.q.end(), v.begin(), [](double q) { return std::sqrt(q); });
  std::vector<TightSpot> spots;
  for (const Valley& valley : valleys(v, feed)) {
    const std::size_t b = valley.bottom;
    TightSpot spot;
    spot.from = path.s[valley.from];
    spot.to = path.s[valley.to];
    spot.s = path.s[b];
    spot.x = path.x[b];
    spot.y = path.y[b];
    spot.speed = v[b];
    const bool corner = (b + 1 < v.size() && path.breakAfter[b] == path::BreakKind::tangentBreak) ||
                        (b > 0 && path.breakAfter[b - 1] == path::BreakKind::tangentBreak);
    spot.radius = corner ? 0.0 : radiusOf(path.k[b]);
    const bool rest = b == 0 || b + 1 == v.size();
    spot.limitedBy = corner ? LimitName::joint : rest ? LimitName::stop : plan.limitedBy[b];
    spot.timeLost = timeBetween(path, v, valley.from, valley.to) - (spot.to - spot.from) / feed;
    spots.push_back(spot);
  }
  std::stable_sort(spots.begin(), spots.end(),
                   [](const TightSpot& a, const TightSpot& b) { return a.timeLost > b.timeLost; });
  if (spots.size() > kMostSpots) spots.resize(kMostSpots);
  return spots;
}

}  // namespace

Result<PreparedContour> prepareContour(const contour::Contour& contour, int number,
                                       const PlanOptions& options, RunControl& control) {
  path::Options placing;
  placing.targetNodes = options.targetNodes;
  placing.gradeAtStops = options.law == plan::Law::jerk;
  auto built = path::buildPath(contour, placing, control);
  if (!built) return built.error();
  PreparedContour prepared;
  prepared.path = std::make_shared<const path::Path>(std::move(*built));
  ContourFacts& facts = prepared.facts;
  facts.number = number;
  facts.name = contour.name;
  facts.closed = contour.closed;
  facts.length = prepared.path->length;
  for (double k : prepared.path->k) facts.maxCurvature = std::max(facts.maxCurvature, std::abs(k));
  facts.minRadius = radiusOf(facts.maxCurvature);
  for (const contour::Joint& joint : contour::findJoints(prepared.path->contour())) {
    if (joint.kind != contour::JointKind::smooth) facts.joints.push_back(joint);
  }
  return prepared;
}

std::vector<TightSpot> geometricTightSpots(const path::Path& path) {
  std::vector<TightSpot> spots;
  const std::size_t n = path.size();
  const auto add = [&](std::size_t i, double radius) {
    TightSpot spot;
    spot.s = spot.from = spot.to = path.s[i];
    spot.x = path.x[i];
    spot.y = path.y[i];
    spot.radius = radius;
    spot.limitedBy = radius == 0.0 ? LimitName::joint : LimitName::centripetal;
    spots.push_back(spot);
  };
  for (std::size_t i = 0; i < n; ++i) {
    if (path.breakAfter[i] == path::BreakKind::tangentBreak) add(i, 0.0);
    const double k = std::abs(path.k[i]);
    const double before = i > 0 ? std::abs(path.k[i - 1]) : path.closed ? std::abs(path.k[n - 2]) : 0.0;
    // A stretch of equal curvature counts once, where it begins.
    std::size_t j = i + 1;
    while (j < n && std::abs(std::abs(path.k[j]) - k) <= 1e-9 * k) ++j;
    const double after = j < n ? std::abs(path.k[j]) : path.closed ? std::abs(path.k[1]) : 0.0;
    if (k > 1e-9 && k > before * (1.0 + 1e-9) && k > after * (1.0 + 1e-9)) add(i, 1.0 / k);
  }
  if (spots.empty() && std::abs(path.k[0]) > 1e-9) add(0, 1.0 / std::abs(path.k[0]));  // a circle
  std::stable_sort(spots.begin(), spots.end(),
                   [](const TightSpot& a, const TightSpot& b) { return a.radius < b.radius; });
  if (spots.size() > kMostSpots) spots.resize(kMostSpots);
  return spots;
}

Result<PlannedContour> planContour(const PreparedContour& prepared, const limits::Limits& limits,
                                   const PlanOptions& options, bool withPrices, RunControl& control) {
  plan::Options planning;
  planning.law = lawFor(limits, options);
  auto plan = plan::makePlan(*prepared.path, limits, planning, control);
  if (!plan) return Error{plan.error().code, prepared.facts.name + ": " + plan.error().message};
  PlannedContour planned;
  planned.facts = prepared.facts;
  planned.path = prepared.path;
  planned.drive = prepared.drive;
  planned.law = planning.law;
  planned.plan = std::move(*plan);
  planned.meanFeed = prepared.facts.length / planned.plan.time;
  if (limits.lowerFeed) planned.lowSpeed = plan::lowSpeedStretches(planned.plan.schedule, *limits.lowerFeed);
  planned.tightSpots = spotsOf(*prepared.path, planned.plan, *limits.feed);
  if (withPrices) {
    auto prices = plan::prices(*prepared.path, limits, planning, 10.0, control);
    if (!prices) return prices.error();
    planned.prices = std::move(*prices);
  }
  return planned;
}

plan::Law lawFor(const limits::Limits& limits, const PlanOptions& options) {
  const bool jerk = limits.x.jerk || limits.y.jerk || limits.tangentialJerk;
  return options.law.value_or(jerk ? plan::Law::jerk : plan::Law::acceleration);
}

}  // namespace kf::pipeline
