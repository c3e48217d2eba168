// Node placement along arc length, and exact evaluation between nodes.
// Lengths in mm.
#include "core/path/path.h"

#include <algorithm>
#include <cassert>
#include <cmath>
#include <string>

#include "core/curve/arc_length.h"
#include "core/numeric/gauss_legendre.h"
#include "core/path/stretches.h"

namespace kf::path {
namespace {

using curve::Curve;
using curve::Side;

// Shares of the nodes that follow length, turning and the slope of the curvature.
constexpr double kLengthShare = 0.5, kTurnShare = 0.25, kSwingShare = 0.25;
constexpr int kLeastCellsBesideRest = 4;
// Between two tight corners the motion speeds up and slows down: one cell would hold it at the corners'
// speed.
constexpr int kLeastCellsBesideBend = 4;
// Under a jerk limit a bend that comes and goes within one cell would be seen at its ends only.
constexpr int kLeastCellsInBend = 3;
// Toward a stop cells shrink in proportion to their distance from it, down to this part of the way between
// stops.
constexpr double kGrading = 0.05, kGradingFloor = 1e-4;
// A path of many stops shares its nodes: beyond so many, cells grow with the number of stops.
constexpr double kStopsAtFullGrading = 20.0, kCoarsestGrading = 0.6;

// Cumulative number of cells wanted from the start of a stretch, at its fine samples.
class Density {
 public:
  Density(const Stretches& all, const Options& options) : all_(all), options_(options) {
    const double step = options.largestStep > 0.0 ? options.largestStep : all.length / 50.0;
    target_ = static_cast<double>(std::max<std::size_t>(options.targetNodes, 2));
    // Straight or evenly bent paths hand the unused shares to length.
    const double turn = all.turn > 0.0 ? kTurnShare : 0.0, swing = all.swing > 0.0 ? kSwingShare : 0.0;
    perLength_ = std::max(target_ * (1.0 - turn - swing) / all.length, 1.0 / step);
    perTurn_ = turn > 0.0 ? target_ * turn / all.turn : 0.0;
    perSwing_ = swing > 0.0 ? target_ * swing / all.swing : 0.0;
    stops_.push_back(0.0);
    for (const Stretch& stretch : all.list) {
      if (stretch.breakBefore == BreakKind::tangentBreak) stops_.push_back(stretch.start);
    }
    stops_.push_back(all.length);
    grading_ = std::clamp(kGrading * static_cast<double>(stops_.size()) / kStopsAtFullGrading, kGrading,
                          kCoarsestGrading);
  }

  bool besideRest(const Stretch& stretch) const {
    const double end = stretch.start + stretch.length;
    const auto next = std::lower_bound(stops_.begin(), stops_.end(), stretch.start);
    return (next != stops_.end() && *next <= end) || stretch.start == 0.0;
  }

  std::vector<double> along(const Stretch& stretch, std::vector<double>& u, std::vector<double>& s) const {
    u = stretch.u;
    s = stretch.s;
    std::vector<double> cells(stretch.s.size());
    for (std::size_t i = 0; i < cells.size(); ++i) {
      cells[i] = perLength_ * stretch.s[i] + perTurn_ * stretch.turn[i] + perSwing_ * stretch.swing[i];
    }
    if (options_.gradeAtStops) addGrading(stretch, u, s, cells);
    return cells;
  }

 private:
  // Adds the integral of 1 / (grading (d + floor)), d the distance from the nearer stop, on a finer set of
  // samples.
  void addGrading(const Stretch& stretch, std::vector<double>& u, std::vector<double>& s,
                  std::vector<double>& cells) const {
    const auto after = std::upper_bound(stops_.begin(), stops_.end(), stretch.start);
    const double low = *(after - 1), high = after == stops_.end() ? all_.length : *after;
    const double floor = kGradingFloor * (high - low);
    std::vector<double> places = s;
    for (double d = 0.25 * floor; d < stretch.length; d *= 1.3) {
      const double a = low + d - stretch.start, b = high - d - stretch.start;
      if (a > 0.0 && a < stretch.length) places.push_back(a);
      if (b > 0.0 && b < stretch.length) places.push_back(b);
    }
    std::sort(places.begin(), places.end());
    places.erase(std::unique(places.begin(), places.end()), places.end());
    std::vector<double> newU, newCells;
    std::size_t j = 0;
    const double middle = 0.5 * (low + high);
    const auto graded = [&](double at) {
      const double x = stretch.start + at;
      const double left = std::log1p(std::max(0.0, std::min(x, middle) - low) / floor);
      const double right =
          std::log1p((high - middle) / floor) - std::log1p((high - std::max(x, middle)) / floor);
      return (left + right) / grading_;
    };
    const double base = graded(0.0);
    for (double at : places) {
      while (j + 2 < s.size() && s[j + 1] < at) ++j;
      const double part = (at - s[j]) / (s[j + 1] - s[j]);
      newU.push_back(u[j] + part * (u[j + 1] - u[j]));
      newCells.push_back(cells[j] + part * (cells[j + 1] - cells[j]) + graded(at) - base);
    }
    u = std::move(newU);
    s = std::move(places);
    cells = std::move(newCells);
  }

  const Stretches& all_;
  const Options& options_;
  double target_ = 0.0, perLength_ = 0.0, perTurn_ = 0.0, perSwing_ = 0.0;
  std::vector<double> stops_;
  double grading_ = kGrading;
};

// True where the stretch before or after is bent far more tightly, so that the motion leaves or nears it
// slowly.
bool isBesideTighterBend(const std::vector<Stretch>& all, std::size_t i) {
  const auto bend = [&all](std::size_t j) { return all[j].turn.back() / all[j].length; };
  constexpr double kMuch = 4.0;
  return (i > 0 && bend(i - 1) > kMuch * bend(i)) || (i + 1 < all.size() && bend(i + 1) > kMuch * bend(i));
}

void addNode(Path& path, const contour::Contour& contour, std::uint32_t segment, double u, double s,
             Side side) {
  const Curve& c = contour.segments[segment].curve;
  const curve::Bend bend = curve::bendNear(c, u, side);
  const curve::Vec2 p = c.point(u);
  path.s.push_back(s);
  path.x.push_back(p.x);
  path.y.push_back(p.y);
  path.tx.push_back(bend.tangent.x);
  path.ty.push_back(bend.tangent.y);
  path.k.push_back(bend.k);
  path.dk.push_back(bend.dkds);
  path.u.push_back(u);
  path.segment.push_back(segment);
  path.breakAfter.push_back(BreakKind::none);
}

// Parameters of `count` cells of equal weight between the stretch's ends.
std::vector<double> equalShares(const std::vector<double>& u, const std::vector<double>& cells,
                                std::size_t count) {
  std::vector<double> places{u.front()};
  std::size_t j = 0;
  for (std::size_t i = 1; i < count; ++i) {
    const double wanted = cells.back() * static_cast<double>(i) / static_cast<double>(count);
    while (j + 2 < cells.size() && cells[j + 1] < wanted) ++j;
    const double width = cells[j + 1] - cells[j];
    places.push_back(u[j] + (width > 0.0 ? (wanted - cells[j]) / width : 0.5) * (u[j + 1] - u[j]));
  }
  places.push_back(u.back());
  return places;
}

void addStretch(Path& path, const contour::Contour& contour, const Stretch& stretch,
                const std::vector<double>& places) {
  const Curve& c = contour.segments[stretch.segment].curve;
  const auto speed = [&c](double u) { return curve::norm(c.jet(u).d1); };
  const bool even = c.asLine() != nullptr || c.asArc() != nullptr;
  std::vector<double> s{0.0};
  const auto measure = [&](const auto& cellLength) {
    s.assign(1, 0.0);
    for (std::size_t i = 1; i < places.size(); ++i)
      s.push_back(s.back() + cellLength(places[i - 1], places[i]));
  };
  if (even) {
    const double rate = stretch.length / (stretch.to - stretch.from);
    measure([rate](double a, double b) { return rate * (b - a); });
  } else {
    measure([&](double a, double b) { return numeric::gauss10(speed, a, b); });
    if (std::abs(s.back() - stretch.length) > 1e-13 * stretch.length) {
      measure([&](double a, double b) { return curve::arcLength(c, a, b)->length; });
    }
  }
  // Rounding is spread so that the stretches add up exactly.
  const double fit = stretch.length / s.back();
  const bool joined = !path.s.empty() && stretch.breakBefore == BreakKind::none;
  if (!path.s.empty() && !joined) path.breakAfter.back() = stretch.breakBefore;
  for (std::size_t i = joined ? 1 : 0; i < places.size(); ++i) {
    const bool end = i + 1 == places.size();
    const double at = end ? stretch.start + stretch.length : stretch.start + fit * s[i];
    addNode(path, contour, stretch.segment, places[i], at, end ? Side::left : Side::right);
  }
}

}  // namespace

Result<Path> buildPath(const contour::Contour& contour, const Options& options, RunControl& control) {
  if (contour.segments.empty())
    return Error{ErrorCode::invalidArgument, "the contour " + contour.name + " is empty; choose another one"};
  Path path;
  auto shared = std::make_shared<const contour::Contour>(contour::splitAtKnots(contour));
  auto stretches = findStretches(*shared, options, control);
  if (!stretches) return stretches.error();
  const Density density(*stretches, options);
  std::vector<double> u, s;
  double done = 0.0;
  for (const Stretch& stretch : stretches->list) {
    if (control.isCancelled()) return Error{ErrorCode::cancelled, "cancelled"};
    const std::vector<double> cells = density.along(stretch, u, s);
    double count = std::max(1.0, std::round(cells.back()));
    if (isBesideTighterBend(stretches->list, static_cast<std::size_t>(&stretch - stretches->list.data())))
      count = std::max<double>(count, kLeastCellsBesideBend);
    if (density.besideRest(stretch)) count = std::max<double>(count, kLeastCellsBesideRest);
    if (options.gradeAtStops && stretch.swing.back() > 0.0)
      count = std::max<double>(count, kLeastCellsInBend);
    addStretch(path, *shared, stretch, equalShares(u, cells, static_cast<std::size_t>(count)));
    done += stretch.length;
    control.report(done / stretches->length);
  }
  path.closed = contour.closed;
  path.length = stretches->length;
  path.s.back() = path.length;
  path.breakAfter.back() = stretches->closing;
  path.contour_ = std::move(shared);
  return path;
}

Sample Path::sample(double at) const {
  const auto above = std::upper_bound(s.begin(), s.end(), at);
  std::size_t hint = above == s.begin() ? 0 : static_cast<std::size_t>(above - s.begin()) - 1;
  return sample(at, hint);
}

Sample Path::sample(double at, std::size_t& hint) const {
  assert(size() >= 2);
  at = std::clamp(at, 0.0, length);
  std::size_t i = std::min(hint, size() - 2);
  while (i > 0 && s[i] > at) --i;
  while (i + 2 < size() && s[i + 1] <= at) ++i;
  if (s[i] == s[i + 1] && i > 0) --i;  // the last pair of a path that ends in a break
  hint = i;
  const Curve& c = contour_->segments[segment[i]].curve;
  const double a = u[i], b = u[i + 1], width = s[i + 1] - s[i], want = at - s[i];
  double v = a + (b - a) * (width > 0.0 ? want / width : 0.0);
  if (c.asLine() == nullptr && c.asArc() == nullptr && want > 0.0 && want < width) {
    const auto speed = [&c](double place) { return curve::norm(c.jet(place).d1); };
    for (int step = 0; step < 20; ++step) {
      const double excess = numeric::gauss10(speed, a, v) - want;
      const double rate = speed(v);
      if (!(rate > 0.0)) break;
      const double next = std::clamp(v - excess / rate, a, b);
      const bool settled = std::abs(next - v) <= 1e-14 * std::max(std::abs(v), b - a);
      v = next;
      if (settled || std::abs(excess) <= 1e-14 * length) break;
    }
  }
  const bool end = want >= width;
  const curve::Bend bend = curve::bendNear(c, v, end ? Side::left : Side::right);
  const curve::Vec2 p = c.point(v);
  return {p.x, p.y, bend.tangent.x, bend.tangent.y, bend.k, bend.dkds};
}

}  // namespace kf::path
