// Lines and arcs that points truly lie on.
// Lengths in mm, angles in rad.
#include "core/construct/fit_shapes.h"

#include <algorithm>
#include <array>
#include <cmath>
#include <numbers>

#include "core/construct/deviation.h"

namespace kf::construct {
namespace {

using curve::Arc;
using curve::Line;
using curve::Vec2;

constexpr std::size_t kLeastPoints = 8;
constexpr std::size_t kBlocks = 8;

// A straight line (curved = false) or a circle, as signed offsets of points.
struct Shape {
  bool curved = false;
  Vec2 centre;     // of the points on a line, of the circle
  Vec2 direction;  // of the line
  double radius = 0.0;
  double offset(Vec2 p) const {
    return curved ? curve::distance(p, centre) - radius : curve::cross(direction, p - centre);
  }
};

struct Moments {
  Vec2 mean;
  double xx = 0.0, xy = 0.0, yy = 0.0;
};

Moments momentsOf(const Vec2* p, std::size_t n) {
  Moments m;
  for (std::size_t i = 0; i < n; ++i) m.mean += p[i];
  m.mean = m.mean / static_cast<double>(n);
  for (std::size_t i = 0; i < n; ++i) {
    const Vec2 d = p[i] - m.mean;
    m.xx += d.x * d.x;
    m.xy += d.x * d.y;
    m.yy += d.y * d.y;
  }
  return m;
}

// Total least squares: the axis of the larger second moment.
Shape bestLine(const Vec2* p, std::size_t n) {
  const Moments m = momentsOf(p, n);
  const double angle = 0.5 * std::atan2(2.0 * m.xy, m.xx - m.yy);
  Shape line{false, m.mean, {std::cos(angle), std::sin(angle)}, 0.0};
  if (curve::dot(line.direction, p[n - 1] - p[0]) < 0.0) line.direction = -line.direction;
  return line;
}

// Least squares on the squared distances (Kasa), then Gauss-Newton on the distances themselves.
std::optional<Shape> bestCircle(const Vec2* p, std::size_t n) {
  const Moments m = momentsOf(p, n);
  double xr = 0.0, yr = 0.0;
  for (std::size_t i = 0; i < n; ++i) {
    const Vec2 d = p[i] - m.mean;
    const double r = curve::dot(d, d);
    xr += d.x * r;
    yr += d.y * r;
  }
  const double det = m.xx * m.yy - m.xy * m.xy;
  if (!(det > 1e-14 * (m.xx + m.yy) * (m.xx + m.yy))) return std::nullopt;
  Vec2 c{0.5 * (xr * m.yy - yr * m.xy) / det, 0.5 * (yr * m.xx - xr * m.xy) / det};
  Shape circle{true, m.mean + c, {}, std::sqrt(curve::dot(c, c) + (m.xx + m.yy) / static_cast<double>(n))};
  for (int step = 0; step < 4; ++step) {
    // Unknowns: centre and radius; the normal equations of r_i = |p_i - c| - R.
    std::array<double, 6> a{};  // aa ab ac bb bc cc with c = 1
    std::array<double, 3> b{};
    for (std::size_t i = 0; i < n; ++i) {
      const Vec2 d = p[i] - circle.centre;
      const double r = curve::norm(d);
      if (!(r > 0.0)) return std::nullopt;
      const double gx = -d.x / r, gy = -d.y / r, rest = r - circle.radius;
      a[0] += gx * gx;
      a[1] += gx * gy;
      a[2] -= gx;
      a[3] += gy * gy;
      a[4] -= gy;
      a[5] += 1.0;
      b[0] -= gx * rest;
      b[1] -= gy * rest;
      b[2] += rest;
    }
    const double c00 = a[3] * a[5] - a[4] * a[4], c01 = a[2] * a[4] - a[1] * a[5],
                 c02 = a[1] * a[4] - a[2] * a[3];
    const double c11 = a[0] * a[5] - a[2] * a[2], c12 = a[1] * a[2] - a[0] * a[4],
                 c22 = a[0] * a[3] - a[1] * a[1];
    const double whole = a[0] * c00 + a[1] * c01 + a[2] * c02;
    if (!(std::abs(whole) > 0.0)) return std::nullopt;
    circle.centre +=
        Vec2{(c00 * b[0] + c01 * b[1] + c02 * b[2]) / whole, (c01 * b[0] + c11 * b[1] + c12 * b[2]) / whole};
    circle.radius += (c02 * b[0] + c12 * b[1] + c22 * b[2]) / whole;
  }
  if (!std::isfinite(circle.radius) || !(circle.radius > 0.0)) return std::nullopt;
  return circle;
}

bool holds(const Shape& shape, const Vec2* p, std::size_t n, const RecogniseOptions& options) {
  const double floor = 1e-3 * options.tolerance, most = mostOff(options);
  std::size_t from = 0;
  for (std::size_t block = 1; block <= kBlocks; ++block) {
    const std::size_t to = n * block / kBlocks;
    double sum = 0.0;
    for (std::size_t i = from; i < to; ++i) {
      const double offset = shape.offset(p[i]);
      if (std::abs(offset) > most) return false;
      sum += offset;
    }
    const auto count = static_cast<double>(to - from);
    if (std::abs(sum) > 4.0 * options.scatter * std::sqrt(count) + floor * count) return false;
    from = to;
  }
  return true;
}

// The turn from the first to the last point about the centre, following the points.
double sweepOf(const Shape& circle, const Vec2* p, std::size_t n) {
  double sweep = 0.0;
  for (std::size_t i = 1; i < n; ++i) {
    const Vec2 a = p[i - 1] - circle.centre, b = p[i] - circle.centre;
    sweep += std::atan2(curve::cross(a, b), curve::dot(a, b));
  }
  return sweep;
}

std::optional<Shape> bestShape(const Vec2* p, std::size_t n, bool curved) {
  if (curved) return bestCircle(p, n);
  return bestLine(p, n);
}

// The most points from p on that a shape of this kind holds: doubled until it fails, then halved in.
std::size_t mostHeld(const Vec2* p, std::size_t available, bool curved, const RecogniseOptions& options) {
  const auto good = [&](std::size_t n) {
    const auto shape = bestShape(p, n, curved);
    return shape && holds(*shape, p, n, options) && (!curved || std::abs(sweepOf(*shape, p, n)) < 6.2);
  };
  if (available < kLeastPoints || !good(kLeastPoints)) return 0;
  std::size_t held = kLeastPoints, failed = available + 1;
  while (held < available) {
    const std::size_t next = std::min(available, 2 * held);
    if (!good(next)) {
      failed = next;
      break;
    }
    held = next;
  }
  while (failed - held > 1 && held < available) {
    const std::size_t middle = held + (failed - held) / 2;
    (good(middle) ? held : failed) = middle;
  }
  return held;
}

Arc arcOf(const Shape& circle, const Vec2* p, std::size_t n) {
  const Vec2 from = p[0] - circle.centre, to = p[n - 1] - circle.centre;
  const double start = std::atan2(from.y, from.x), rough = sweepOf(circle, p, n);
  double sweep = std::atan2(to.y, to.x) - start;
  sweep += 2.0 * std::numbers::pi * std::round((rough - sweep) / (2.0 * std::numbers::pi));
  return {circle.centre, circle.radius, start, sweep};
}

}  // namespace

double mostOff(const RecogniseOptions& options) {
  return std::min(options.tolerance, std::max(4.5 * options.scatter, 1e-3 * options.tolerance));
}

double scatterOf(const std::vector<Vec2>& points) {
  std::vector<double> offsets;
  for (std::size_t i = 2; i + 2 < points.size(); ++i) {
    const std::array<std::size_t, 4> at = {i - 2, i - 1, i + 1, i + 2};
    std::array<double, 4> u{};
    u[1] = -curve::distance(points[i - 1], points[i]);
    u[0] = u[1] - curve::distance(points[i - 2], points[i - 1]);
    u[2] = curve::distance(points[i], points[i + 1]);
    u[3] = u[2] + curve::distance(points[i + 1], points[i + 2]);
    Vec2 guess{0.0, 0.0};
    double variance = 1.0;
    for (std::size_t a = 0; a < 4; ++a) {
      double w = 1.0;
      for (std::size_t b = 0; b < 4; ++b) {
        if (b != a) w *= -u[b] / (u[a] - u[b]);
      }
      guess += w * points[at[a]];
      variance += w * w;
    }
    const Vec2 along = curve::unit(points[i + 1] - points[i - 1]);
    offsets.push_back(std::abs(curve::cross(along, points[i] - guess)) / std::sqrt(variance));
  }
  if (offsets.empty()) return 0.0;
  const auto middle = offsets.begin() + static_cast<std::ptrdiff_t>(offsets.size() / 2);
  std::nth_element(offsets.begin(), middle, offsets.end());
  return *middle / 0.6745;
}

Attempt recognise(const std::vector<Vec2>& points, std::size_t first, const RecogniseOptions& options) {
  const Vec2* p = points.data() + first;
  const std::size_t available = points.size() - first;
  const std::size_t straight = mostHeld(p, available, false, options);
  const std::size_t round = mostHeld(p, available, true, options);
  Attempt attempt;
  attempt.held = std::max(straight, round);
  if (attempt.held < kLeastPoints) return attempt;
  // A large circle holds about as many points of a line as the line itself.
  const bool curved = round > straight + straight / 4;
  const std::size_t n = curved ? round : straight;
  const Shape shape = *bestShape(p, n, curved);
  const std::size_t beyond = n - 1 + n / 4;
  if (n < available && beyond < available && std::abs(shape.offset(p[beyond])) < kAbrupt * mostOff(options))
    return attempt;
  if (curved) {
    const Arc arc = arcOf(shape, p, n);
    if (std::abs(arc.sweep) >= 0.35) attempt.found = Recognised{first, first + n - 1, arc};
    return attempt;
  }
  const auto foot = [&shape](Vec2 q) {
    return shape.centre + curve::dot(q - shape.centre, shape.direction) * shape.direction;
  };
  if (curve::distance(p[0], p[n - 1]) >= 100.0 * options.scatter)
    attempt.found = Recognised{first, first + n - 1, Line{foot(p[0]), foot(p[n - 1])}};
  return attempt;
}

std::optional<Arc> recogniseCircle(const std::vector<Vec2>& points, const RecogniseOptions& options) {
  if (points.size() < 2 * kLeastPoints) return std::nullopt;
  const auto circle = bestCircle(points.data(), points.size() - 1);
  if (!circle || !holds(*circle, points.data(), points.size() - 1, options)) return std::nullopt;
  const double sweep = sweepOf(*circle, points.data(), points.size());
  if (std::abs(std::abs(sweep) - 2.0 * std::numbers::pi) > 1e-6) return std::nullopt;
  const Vec2 from = points.front() - circle->centre;
  return Arc{circle->centre, circle->radius, std::atan2(from.y, from.x),
             sweep > 0.0 ? 2.0 * std::numbers::pi : -2.0 * std::numbers::pi};
}

}  // namespace kf::construct
