// Path data and basic shapes.
// Lengths in user units, angles in rad.
#include "core/read/svg_path.h"

#include <algorithm>
#include <cmath>
#include <numbers>
#include <string>

#include <fmt/format.h>

#include "core/read/svg_scan.h"

namespace kf::read::svg {
namespace {

using curve::Arc;
using curve::Curve;
using curve::EllipticArc;
using curve::Line;
using curve::Vec2;

constexpr double kPi = std::numbers::pi;
// Rounding of the coordinates, against the path's size: a closing line shorter than this is none.
constexpr double kRounding = 1e-9;
// Control points this close to the chord, against its length, make a line of a Bezier.
constexpr double kStraight = 1e-12;

bool isLine(const std::vector<Vec2>& points) {
  const Vec2 chord = points.back() - points.front();
  const double square = dot(chord, chord);
  return std::all_of(points.begin() + 1, points.end() - 1, [&](Vec2 p) {
    const Vec2 v = p - points.front();
    const double along = dot(v, chord);
    return std::abs(cross(chord, v)) <= kStraight * square && along >= 0.0 && along <= square;
  });
}

class PathReader {
 public:
  explicit PathReader(std::string_view data) : scan_(data) {}

  Result<std::vector<Curve>> run() {
    scan_.skipBlanks();
    if (stripped(scan_.rest()) == "none") return std::move(curves_);
    while (!scan_.atEnd()) {
      const char command = scan_.peek();
      const bool relative = command >= 'a' && command <= 'z';
      const char kind = relative ? static_cast<char>(command - 32) : command;
      if (std::string_view("MLHVCSQTAZ").find(kind) == std::string_view::npos || kind == '\0')
        return bad("holds no path command");
      if (!started_ && kind != 'M') return bad("must begin with a move (M or m)");
      scan_.take(command);
      relative_ = relative;
      if (auto done = kind == 'Z' ? close() : repeat(kind); !done) return done.error();
      scan_.skipBlanks();
    }
    return std::move(curves_);
  }

 private:
  Error bad(std::string_view what) const {
    return {ErrorCode::cannotRead, fmt::format("character {} of its path data {}", scan_.at() + 1, what)};
  }

  // A command's arguments, and again for as long as a number follows. Moves go on as lines.
  Result<void> repeat(char kind) {
    bool first = true, comma = false;
    for (;;) {
      scan_.skipBlanks();
      if (auto done = step(kind, first); !done) return done.error();
      comma = scan_.skipSeparator();
      const char c = scan_.peek();
      const bool more = (c >= '0' && c <= '9') || c == '.' || c == '-' || c == '+';
      if (!more) break;
      first = false;
      if (kind == 'M') kind = 'L';
    }
    if (comma) return bad("follows a comma but is no number");
    return {};
  }

  Result<double> number() {
    if (!firstArgument_) scan_.skipSeparator();
    firstArgument_ = false;
    const auto value = scan_.number();
    if (!value) return bad("should begin a finite number");
    return *value;
  }
  Result<bool> flag() {
    scan_.skipSeparator();
    const auto value = scan_.flag();
    if (!value) return bad("should be an arc flag, 0 or 1");
    return *value;
  }
  Result<Vec2> point() {
    auto x = number();
    if (!x) return x.error();
    auto y = number();
    if (!y) return y.error();
    const Vec2 p{*x, *y};
    return relative_ ? at_ + p : p;
  }
  Result<std::vector<Vec2>> points(std::size_t count) {
    std::vector<Vec2> list;
    for (std::size_t i = 0; i < count; ++i) {
      auto p = point();
      if (!p) return p.error();
      list.push_back(*p);
    }
    return list;
  }

  Result<void> step(char kind, bool first) {
    firstArgument_ = true;
    switch (kind) {
      case 'M':
        return move(first);
      case 'L':
      case 'H':
      case 'V':
        return line(kind);
      case 'C':
      case 'S':
      case 'Q':
      case 'T':
        return bezier(kind);
      default:
        return arc();
    }
  }

  Result<void> move(bool first) {
    auto p = point();
    if (!p) return p.error();
    if (!isFinite(*p)) return bad("ends a coordinate that is too large");
    if (first) start_ = *p;
    at_ = *p;
    started_ = true;
    forget();
    grow(at_);
    return {};
  }

  Result<void> line(char kind) {
    Vec2 to = at_;
    if (kind == 'L') {
      auto p = point();
      if (!p) return p.error();
      to = *p;
    } else {
      auto value = number();
      if (!value) return value.error();
      double& coordinate = kind == 'H' ? to.x : to.y;
      coordinate = relative_ ? coordinate + *value : *value;
    }
    if (!(to == at_)) curves_.push_back(Line{at_, to});
    forget();
    return arrive(to);
  }

  // S and T take the mirror image of the last control point, when there was one of their kind.
  Result<void> bezier(char kind) {
    const bool cubic = kind == 'C' || kind == 'S', smooth = kind == 'S' || kind == 'T';
    auto rest = points((cubic ? 3U : 2U) - (smooth ? 1U : 0U));
    if (!rest) return rest.error();
    std::vector<Vec2> all = {at_};
    if (smooth) {
      const bool known = cubic ? afterCubic_ : afterQuadratic_;
      all.push_back(known ? 2.0 * at_ - control_ : at_);
    }
    all.insert(all.end(), rest->begin(), rest->end());
    if (!std::all_of(all.begin(), all.end(), [](Vec2 p) { return isFinite(p); }))
      return bad("ends a coordinate that is too large");
    add(all);
    control_ = all[all.size() - 2];
    afterCubic_ = cubic;
    afterQuadratic_ = !cubic;
    return arrive(all.back());
  }

  void add(const std::vector<Vec2>& all) {
    if (std::all_of(all.begin(), all.end(), [&](Vec2 p) { return p == all.front(); })) return;
    if (!(all.front() == all.back()) && isLine(all)) {
      curves_.push_back(Line{all.front(), all.back()});
      return;
    }
    const std::size_t n = all.size();
    std::vector<double> knots(2 * n, 0.0);
    std::fill(knots.begin() + static_cast<std::ptrdiff_t>(n), knots.end(), 1.0);
    auto spline = curve::makeNurbs(static_cast<int>(n) - 1, std::move(knots), all);
    if (spline) curves_.push_back(*std::move(spline));
  }

  Result<void> arc() {
    auto rx = number();
    if (!rx) return rx.error();
    auto ry = number();
    if (!ry) return ry.error();
    auto degrees = number();
    if (!degrees) return degrees.error();
    auto large = flag();
    if (!large) return large.error();
    auto sweep = flag();
    if (!sweep) return sweep.error();
    auto to = point();
    if (!to) return to.error();
    const double turn = std::fmod(*degrees, 360.0) * kPi / 180.0;
    for (Curve& piece : arcBetween(at_, {*rx, *ry}, turn, *large, *sweep, *to))
      curves_.push_back(std::move(piece));
    forget();
    return arrive(*to);
  }

  Result<void> close() {
    if (distance(at_, start_) > kRounding * std::max(extent_.width(), extent_.height()))
      curves_.push_back(Line{at_, start_});
    at_ = start_;
    forget();
    return {};
  }

  Result<void> arrive(Vec2 to) {
    if (!isFinite(to)) return bad("ends a coordinate that is too large");
    at_ = to;
    grow(to);
    return {};
  }
  void grow(Vec2 p) { extent_.include(p); }
  void forget() { afterCubic_ = afterQuadratic_ = false; }

  Scanner scan_;
  std::vector<Curve> curves_;
  Vec2 at_, start_, control_;
  curve::Box extent_;
  bool started_ = false, relative_ = false, firstArgument_ = true;
  bool afterCubic_ = false, afterQuadratic_ = false;
};

}  // namespace

Result<std::vector<Curve>> pathCurves(std::string_view data) {
  return PathReader(data).run();
}

std::vector<Curve> arcBetween(Vec2 from, Vec2 radii, double rotation, bool large, bool sweep, Vec2 to) {
  if (from == to) return {};
  double rx = std::abs(radii.x), ry = std::abs(radii.y);
  if (rx == 0.0 || ry == 0.0) return {Line{from, to}};
  // In the frame where the ellipse is the unit circle about `c`: half the chord is h, seen from its middle.
  const Vec2 axis{std::cos(rotation), std::sin(rotation)};
  const Vec2 half = 0.5 * (from - to), middle = 0.5 * (from + to);
  const Vec2 turned{dot(axis, half), cross(axis, half)};
  const double size = std::hypot(turned.x / rx, turned.y / ry);
  double lift = 0.0;
  if (size >= 1.0 - 1e-15) {  // rounding must not pull a half turn apart
    rx *= size;
    ry *= size;
  } else {
    lift = std::sqrt((1.0 - size) * (1.0 + size)) / size;
    if (large == sweep) lift = -lift;
  }
  const Vec2 h{turned.x / rx, turned.y / ry};
  const Vec2 c{lift * h.y, -lift * h.x};  // a quarter turn from h
  const Vec2 first = h - c, second = -h - c;
  const double start = std::atan2(first.y, first.x);
  double turn = lift == 0.0 ? kPi : std::atan2(cross(first, second), dot(first, second));
  if (lift == 0.0) {
    turn = sweep ? kPi : -kPi;
  } else if (sweep && turn < 0.0) {
    turn += 2.0 * kPi;
  } else if (!sweep && turn > 0.0) {
    turn -= 2.0 * kPi;
  }
  if (std::abs(turn) < 1e-12 || !std::isfinite(start) || !std::isfinite(lift)) return {Line{from, to}};
  const Vec2 u = rx * axis, v = ry * leftOf(axis);
  const Vec2 centre = middle + c.x * u + c.y * v;
  if (rx == ry) return {Arc{centre, rx, start + rotation, turn}};
  return {EllipticArc{centre, u, v, start, turn}};
}

std::vector<Curve> rectangleCurves(double x, double y, double width, double height, double rx, double ry) {
  const double right = x + width, bottom = y + height;
  if (rx <= 0.0 || ry <= 0.0) return chainOfLines({{x, y}, {right, y}, {right, bottom}, {x, bottom}}, true);
  std::vector<Curve> curves;
  const auto line = [&curves](Vec2 a, Vec2 b) {
    if (!(a == b)) curves.push_back(Line{a, b});
  };
  const auto corner = [&](Vec2 centre, double start) {
    if (rx == ry) {
      curves.push_back(Arc{centre, rx, start, 0.5 * kPi});
    } else {
      curves.push_back(EllipticArc{centre, {rx, 0.0}, {0.0, ry}, start, 0.5 * kPi});
    }
  };
  const double left = x + rx, inRight = rx == 0.5 * width ? left : right - rx;
  const double top = y + ry, inBottom = ry == 0.5 * height ? top : bottom - ry;
  line({left, y}, {inRight, y});
  corner({inRight, top}, -0.5 * kPi);
  line({right, top}, {right, inBottom});
  corner({inRight, inBottom}, 0.0);
  line({inRight, bottom}, {left, bottom});
  corner({left, inBottom}, 0.5 * kPi);
  line({x, inBottom}, {x, top});
  corner({left, top}, kPi);
  return curves;
}

std::vector<Curve> ellipseCurves(double cx, double cy, double rx, double ry) {
  if (rx == ry) return {Arc{{cx, cy}, rx, 0.0, 2.0 * kPi}};
  return {EllipticArc{{cx, cy}, {rx, 0.0}, {0.0, ry}, 0.0, 2.0 * kPi}};
}

std::vector<Curve> chainOfLines(const std::vector<Vec2>& points, bool closed) {
  std::vector<Curve> curves;
  const auto line = [&curves](Vec2 a, Vec2 b) {
    if (!(a == b)) curves.push_back(Line{a, b});
  };
  for (std::size_t i = 1; i < points.size(); ++i) line(points[i - 1], points[i]);
  if (closed && points.size() > 2) line(points.back(), points.front());
  return curves;
}

}  // namespace kf::read::svg
