// One run of short segments, fitted.
// Lengths in mm, angles in rad.
#include "core/construct/fit_run.h"

#include <algorithm>
#include <cmath>

#include "core/construct/deviation.h"
#include "core/construct/fit_shapes.h"

namespace kf::construct {
namespace {

using contour::Segment;
using curve::Arc;
using curve::Curve;
using curve::Line;
using curve::Vec2;

constexpr std::size_t kTransition = 8;  // points between two shapes that a spline joins

double angleBetween(Vec2 a, Vec2 b) {
  return std::atan2(curve::cross(a, b), curve::dot(a, b));
}

EndCondition endOf(const Curve& c, bool atStart) {
  const double u = atStart ? c.first() : c.last();
  const curve::Bend bend = curve::bend(c.jet(u, atStart ? curve::Side::right : curve::Side::left));
  return {c.point(u), true, bend.tangent, bend.k};
}

// A stretch between two corners (or, closed, all around): its shapes and the splines between them.
class StretchFitter {
 public:
  // Without `seekShapes` everything becomes splines.
  StretchFitter(const std::vector<Vec2>& points, const std::vector<double>& heights,
                const FitOptions& options, bool seekShapes)
      : points_(points), heights_(heights), tolerance_(options.tolerance), seekShapes_(seekShapes) {
    recognising_ = {scatterOf(points), 0.5 * options.tolerance};
  }

  // Between fixed ends; false when the tolerance can't be met.
  bool open(const EndCondition& start, const EndCondition& end) {
    findShapes();
    const std::size_t last = points_.size() - 1;
    // A shape that reaches a corner is moved onto it; beside a smooth neighbour a spline must join the two.
    if (start.smooth && !shapes_.empty()) shorten(shapes_.front(), kTransition, 0);
    if (end.smooth && !shapes_.empty()) shorten(shapes_.back(), 0, kTransition);
    separate(false);
    if (!shapes_.empty() && !start.smooth && shapes_.front().first == 0) pin(shapes_.front(), true, start.p);
    if (!shapes_.empty() && !end.smooth && shapes_.back().last == last) pin(shapes_.back(), false, end.p);
    std::size_t at = 0;
    EndCondition from = start;
    for (const Recognised& shape : shapes_) {
      if (shape.first > at && !addSpline(at, shape.first, from, endOf(shape.shape, true))) return false;
      if (!addShape(shape)) return false;
      at = shape.last;
      from = endOf(shape.shape, false);
    }
    return at == last || addSpline(at, last, from, end);
  }

  // All around; `points` repeats its first point at the end.
  bool around() {
    const auto circle = seekShapes_ ? recogniseCircle(points_, recognising_) : std::nullopt;
    if (circle) {
      shapes_ = {{0, points_.size() - 1, *circle}};
      return addShape(shapes_.front());
    }
    findShapes();
    if (shapes_.empty()) return aroundSpline();
    rotate(shapes_.front().last);
    shapes_.clear();
    findShapes();
    if (!shapes_.empty() && shapes_.back().last + 1 == points_.size())
      shorten(shapes_.back(), 0, kTransition / 2);
    if (!shapes_.empty() && shapes_.front().first == 0) shorten(shapes_.front(), kTransition / 2, 0);
    separate(true);
    if (shapes_.empty()) return aroundSpline();
    for (std::size_t i = 0; i < shapes_.size(); ++i) {
      const Recognised &shape = shapes_[i], &next = shapes_[(i + 1) % shapes_.size()];
      if (!addShape(shape)) return false;
      const std::size_t turn = i + 1 == shapes_.size() ? points_.size() - 1 : 0;
      if (!addSpline(shape.last, next.first + turn, endOf(shape.shape, false), endOf(next.shape, true)))
        return false;
    }
    return true;
  }

  std::vector<Segment> segments;
  FitRun counts;

 private:
  // Quarter steps keep the search near linear on curves that are neither.
  void findShapes() {
    if (!seekShapes_) return;
    std::size_t at = 0, free = 0;
    while (at + 1 < points_.size()) {
      Attempt attempt = recognise(points_, at, recognising_);
      if (!attempt.found) {
        at += std::max<std::size_t>(1, attempt.held / 4);
        continue;
      }
      Recognised shape = *attempt.found;
      // The search advances in steps: the shape may begin earlier. It must begin at once, as it must end.
      const double most = mostOff(recognising_);
      while (shape.first > free && offsetFrom(shape.shape, points_[shape.first - 1]) <= most) --shape.first;
      const std::size_t quarter = (shape.last - shape.first) / 4;
      if (shape.first >= free + quarter &&
          offsetFrom(shape.shape, points_[shape.first - quarter]) < kAbrupt * most) {
        at += std::max<std::size_t>(1, attempt.held / 4);
        continue;
      }
      at = free = shape.last;
      shapes_.push_back(shape);
    }
    for (Recognised& shape : shapes_) reshape(shape);
  }

  static double offsetFrom(const Curve& shape, Vec2 p) {
    if (const Arc* arc = shape.asArc()) return std::abs(curve::distance(p, arc->centre) - arc->radius);
    const Line& line = *shape.asLine();
    return std::abs(curve::cross(curve::unit(line.b - line.a), p - line.a));
  }

  // The shape between the feet of its first and last points.
  void reshape(Recognised& shape) const {
    const Vec2 a = points_[shape.first], b = points_[shape.last];
    if (const Line* line = shape.shape.asLine()) {
      const Vec2 t = curve::unit(line->b - line->a);
      shape.shape = Line{line->a + curve::dot(a - line->a, t) * t, line->a + curve::dot(b - line->a, t) * t};
      return;
    }
    Arc arc = *shape.shape.asArc();
    double sweep = 0.0;
    for (std::size_t i = shape.first; i < shape.last; ++i)
      sweep += angleBetween(points_[i] - arc.centre, points_[i + 1] - arc.centre);
    arc.start = std::atan2(a.y - arc.centre.y, a.x - arc.centre.x);
    arc.sweep = sweep;
    shape.shape = arc;
  }

  void shorten(Recognised& shape, std::size_t front, std::size_t back) {
    shape.first += front;
    shape.last = shape.last > back ? shape.last - back : 0;
    if (usable(shape)) reshape(shape);
  }

  static bool usable(const Recognised& shape) { return shape.last >= shape.first + kTransition; }

  // Leaves room for a spline between neighbouring shapes; what becomes too short is dropped.
  void separate(bool closed) {
    for (bool changed = true; changed;) {
      changed = false;
      const auto poor =
          std::find_if(shapes_.begin(), shapes_.end(), [](const Recognised& s) { return !usable(s); });
      if (poor != shapes_.end()) {
        shapes_.erase(poor);
        changed = true;
        continue;
      }
      for (std::size_t i = 0; i + (closed ? 0 : 1) < shapes_.size(); ++i) {
        Recognised &a = shapes_[i], &b = shapes_[(i + 1) % shapes_.size()];
        const std::size_t turn = i + 1 == shapes_.size() ? points_.size() - 1 : 0;
        const std::size_t room = b.first + turn - a.last;
        if (room >= kTransition || (closed && shapes_.size() == 1)) continue;
        const std::size_t lack = kTransition - room;
        shorten(a, 0, (lack + 1) / 2);
        shorten(b, lack / 2, 0);
        changed = true;
        break;
      }
    }
  }

  // Moves one end of a shape onto a corner that it misses by the scatter of its points.
  static void pin(Recognised& shape, bool atStart, Vec2 corner) {
    if (const Line* line = shape.shape.asLine()) {
      shape.shape = atStart ? Line{corner, line->b} : Line{line->a, corner};
      return;
    }
    const Arc arc = *shape.shape.asArc();
    const Vec2 a = atStart ? corner : shape.shape.startPoint(), b = atStart ? shape.shape.endPoint() : corner;
    // The same radius through both ends; the centre on the side and at the distance that the sweep asks for.
    const Vec2 middle = 0.5 * (a + b), across = curve::leftOf(curve::unit(b - a));
    const double half = 0.5 * curve::distance(a, b), radius = std::max(arc.radius, half);
    const double side =
        (arc.sweep > 0.0 ? 1.0 : -1.0) * (std::abs(arc.sweep) > 3.14159265358979 ? -1.0 : 1.0);
    const Vec2 centre = middle + side * std::sqrt(std::max(0.0, radius * radius - half * half)) * across;
    const Vec2 from = a - centre, to = b - centre;
    double sweep = angleBetween(from, to);
    sweep += 6.283185307179586 * std::round((arc.sweep - sweep) / 6.283185307179586);
    shape.shape = Arc{centre, radius, std::atan2(from.y, from.x), sweep};
  }

  bool addShape(const Recognised& shape) {
    double bound = 0.0, u = shape.shape.first();
    double lastGap = curve::distance(points_[shape.first], shape.shape.point(u));
    for (std::size_t i = shape.first + 1; i <= shape.last; ++i) {
      const double next = i == shape.last ? shape.shape.last()
                                          : followClosest(shape.shape, u, shape.shape.last(), points_[i]);
      const double gap = curve::distance(points_[i], shape.shape.point(next));
      const double height = next > u ? chordHeight({&shape.shape, u, next}) : 0.0;
      bound = std::max(bound, std::max(gap, lastGap) + height + heights_[i - 1]);
      lastGap = gap;
      u = next;
    }
    if (bound > tolerance_) return false;
    counts.deviation = std::max(counts.deviation, bound);
    ++(shape.shape.asLine() != nullptr ? counts.lines : counts.arcs);
    segments.push_back({shape.shape, shape.shape.asLine() != nullptr ? "fitted line" : "fitted arc"});
    return true;
  }

  // Points `from` .. `to`, past the end of a closed stretch modulo its length.
  bool addSpline(std::size_t from, std::size_t to, const EndCondition& start, const EndCondition& end) {
    const std::size_t round = points_.size() - 1;
    std::vector<Vec2> points{start.p};
    std::vector<double> heights;
    double misfit = 0.0;
    for (std::size_t i = from; i <= to; ++i) {
      const std::size_t j = i > round ? i - round : i;
      if (i > from && i < to) points.push_back(points_[j]);
      if (i < to) heights.push_back(heights_[j >= round ? 0 : j]);
    }
    points.push_back(end.p);
    // The end conditions stand in for the end points: what they differ by adds to the bound beside them.
    misfit = std::max(curve::distance(start.p, points_[from > round ? from - round : from]),
                      curve::distance(end.p, points_[to > round ? to - round : to]));
    heights.front() += misfit;
    heights.back() += misfit;
    const auto fitted = fitSpline(points, heights, start, end, tolerance_);
    if (!fitted) return false;
    counts.deviation = std::max(counts.deviation, fitted->deviation);
    ++counts.splines;
    Curve made(fitted->spline);
    counts.spans += made.breaks().size() + 1;
    segments.push_back({std::move(made), "fitted spline"});
    return true;
  }

  // A smooth loop without shapes: how it passes its first point is taken from a fit that begins on the far
  // side.
  bool aroundSpline() {
    const std::size_t round = points_.size() - 1, half = round / 2;
    std::vector<Vec2> points;
    std::vector<double> heights;
    for (std::size_t i = half; i <= half + round; ++i) {
      points.push_back(points_[i % round]);
      if (i < half + round) heights.push_back(heights_[i % round]);
    }
    const auto seam = fitSpline(points, heights, {points.front(), false, {}, 0.0},
                                {points.back(), false, {}, 0.0}, tolerance_);
    if (!seam) return false;
    const Curve whole(seam->spline);
    double length = 0.0;
    for (std::size_t i = 0; i < round - half; ++i) length += curve::distance(points[i], points[i + 1]);
    const double u = followClosest(whole, std::max(0.0, length - 1.0), whole.last(), points_[0]);
    const curve::Bend bend = curve::bend(whole.jet(std::clamp(u, 0.0, whole.last())));
    const EndCondition here{whole.point(u), true, bend.tangent, bend.k};
    return addSpline(0, round, here, here);
  }

  void rotate(std::size_t first) {
    points_.pop_back();
    std::rotate(points_.begin(), points_.begin() + static_cast<std::ptrdiff_t>(first % points_.size()),
                points_.end());
    std::rotate(heights_.begin(), heights_.begin() + static_cast<std::ptrdiff_t>(first % heights_.size()),
                heights_.end());
    points_.push_back(points_.front());
  }

  std::vector<Vec2> points_;
  std::vector<double> heights_;
  double tolerance_;
  bool seekShapes_;
  RecogniseOptions recognising_;
  std::vector<Recognised> shapes_;
};

// The direction change at point i between chords at least `reach` long.
class Turns {
 public:
  Turns(const RunPoints& run, double reach)
      : run_(run), reach_(reach), count_(run.points.size() - (run.closed ? 1 : 0)) {}

  // The point at least `distance` before or after i; npos when the run ends first.
  std::size_t away(std::size_t i, double distance, int direction) const {
    std::size_t j = i;
    for (std::size_t steps = 0; steps < count_; ++steps) {
      if (!run_.closed && (direction < 0 ? j == 0 : j + 1 == count_)) return RunPoints::npos;
      j = direction < 0 ? (j + count_ - 1) % count_ : (j + 1) % count_;
      if (curve::distance(run_.points[i], run_.points[j]) >= distance) return j;
    }
    return RunPoints::npos;
  }

  struct Turn {
    double angle = 0.0, shorter = 0.0;
  };
  Turn at(std::size_t i) const {
    const std::size_t a = away(i, reach_, -1), b = away(i, reach_, 1);
    if (a == RunPoints::npos || b == RunPoints::npos) return {};
    const Vec2 in = run_.points[i] - run_.points[a], out = run_.points[b] - run_.points[i];
    return {std::abs(angleBetween(in, out)), std::min(curve::norm(in), curve::norm(out))};
  }

 private:
  const RunPoints& run_;
  double reach_;
  std::size_t count_;
};

}  // namespace

RunPoints samplePieces(const contour::Contour& contour, std::size_t first, std::size_t count,
                       double tolerance) {
  RunPoints run;
  const std::size_t n = contour.segments.size();
  Vec2 end;
  for (std::size_t i = 0; i < count; ++i) {
    const std::size_t at = (first + i) % n;
    const Curve& c = contour.segments[at].curve;
    // A gap to the segment before counts as height.
    if (i > 0) run.heights.back() += curve::distance(end, c.startPoint());
    std::size_t parts = 1;
    if (const Arc* arc = c.asArc()) {
      const double step = std::sqrt(8.0 * 0.02 * tolerance / arc->radius);
      parts =
          std::clamp<std::size_t>(static_cast<std::size_t>(std::ceil(std::abs(arc->sweep) / step)), 1, 64);
    }
    for (std::size_t part = 0; part < parts; ++part) {
      const double from = static_cast<double>(part) / static_cast<double>(parts),
                   to = static_cast<double>(part + 1) / static_cast<double>(parts);
      run.points.push_back(c.point(from));
      run.segment.push_back(part == 0 ? at : RunPoints::npos);
      run.heights.push_back(chordHeight({&c, from, to}));
    }
    end = c.endPoint();
  }
  run.closed = contour.closed && count == n;
  run.points.push_back(run.closed ? run.points.front() : end);
  if (run.closed) run.heights.back() += curve::distance(end, run.points.front());
  run.segment.push_back((first + count) % n);
  return run;
}

std::vector<std::size_t> findCorners(const RunPoints& run, const FitOptions& options) {
  std::vector<std::size_t> corners;
  const double reach = 8.0 * options.tolerance;
  const Turns turns(run, reach);
  const std::size_t count = run.points.size() - (run.closed ? 1 : 0);
  std::vector<Turns::Turn> all(count);
  for (std::size_t i = 0; i < count; ++i) all[i] = turns.at(i);
  for (std::size_t i = run.closed ? 0 : 1; i < count; ++i) {
    const Turns::Turn& here = all[i];
    // A smooth curve through points this far apart would bulge more than the tolerance allows.
    const bool bulges = here.shorter * here.angle / 8.0 > 1.5 * options.tolerance;
    if (run.segment[i] == RunPoints::npos || (here.angle < options.cornerAngle && !bulges)) continue;
    // The sharpest within reach, the first of equals.
    bool sharpest = true;
    for (int direction : {-1, 1}) {
      const std::size_t limit = turns.away(i, 1.5 * reach, direction);
      for (std::size_t j = i, steps = 0; sharpest && steps < count; ++steps) {
        if (!run.closed && (direction < 0 ? j == 0 : j + 1 == count)) break;
        j = direction < 0 ? (j + count - 1) % count : (j + 1) % count;
        if (j == limit) break;
        sharpest = all[j].angle < here.angle || (all[j].angle == here.angle && j > i);
      }
    }
    if (!sharpest && !bulges) continue;
    double beside = 0.0;
    for (int direction : {-1, 1}) {
      const std::size_t j = turns.away(i, 2.0 * std::max(reach, here.shorter), direction);
      if (j != RunPoints::npos) beside = std::max(beside, all[j].angle);
    }
    if (bulges || here.angle > 2.5 * beside) corners.push_back(i);
  }
  return corners;
}

void fitRun(const contour::Contour& contour, const RunPoints& run, const FitOptions& options,
            std::vector<Segment>& out, FitRun& report, std::size_t& cornerCount) {
  const std::size_t n = contour.segments.size();
  const auto count = [&report](const FitRun& part) {
    report.lines += part.lines;
    report.arcs += part.arcs;
    report.splines += part.splines;
    report.spans += part.spans;
    report.deviation = std::max(report.deviation, part.deviation);
  };
  const auto keep = [&](std::size_t from, std::size_t to) {  // segments, `to` excluded
    ++report.kept;
    std::size_t i = from;
    do {
      out.push_back(contour.segments[i]);
      i = (i + 1) % n;
    } while (i != to);
  };
  std::vector<std::size_t> corners = findCorners(run, options);
  cornerCount += corners.size();
  if (run.closed && corners.empty()) {
    for (bool shapes : {true, false}) {
      StretchFitter fitter(run.points, run.heights, options, shapes);
      if (!fitter.around()) continue;
      count(fitter.counts);
      out.insert(out.end(), fitter.segments.begin(), fitter.segments.end());
      return;
    }
    keep(run.segment.front(), run.segment.front());
    return;
  }
  const std::size_t round = run.points.size() - 1;
  if (run.closed) {
    corners.push_back(corners.front() + round);
  } else {
    corners.insert(corners.begin(), 0);
    corners.push_back(round);
  }
  for (std::size_t c = 0; c + 1 < corners.size(); ++c) {
    std::vector<Vec2> points;
    std::vector<double> heights;
    for (std::size_t i = corners[c]; i <= corners[c + 1]; ++i) {
      points.push_back(run.points[i % (run.closed ? round : round + 1)]);
      if (i < corners[c + 1]) heights.push_back(run.heights[i % round]);
    }
    const auto segmentAt = [&](std::size_t i) { return run.segment[run.closed ? i % round : i]; };
    EndCondition start{points.front(), false, {}, 0.0}, end{points.back(), false, {}, 0.0};
    if (c == 0 && run.before) start = *run.before;
    if (c + 2 == corners.size() && run.after) end = *run.after;
    bool done = false;
    for (bool shapes : {true, false}) {
      StretchFitter fitter(points, heights, options, shapes);
      if (done || points.size() < 4 || !fitter.open(start, end)) continue;
      count(fitter.counts);
      out.insert(out.end(), fitter.segments.begin(), fitter.segments.end());
      done = true;
    }
    if (!done) keep(segmentAt(corners[c]), segmentAt(corners[c + 1]));
  }
}

}  // namespace kf::construct
