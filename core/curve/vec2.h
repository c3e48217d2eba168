// Plane vectors and affine maps.
// Lengths in mm, angles in rad.
#pragma once

#include <cmath>

namespace kf::curve {

struct Vec2 {
  double x = 0.0;
  double y = 0.0;

  Vec2& operator+=(Vec2 o) {
    x += o.x;
    y += o.y;
    return *this;
  }
  Vec2& operator-=(Vec2 o) {
    x -= o.x;
    y -= o.y;
    return *this;
  }
  Vec2& operator*=(double f) {
    x *= f;
    y *= f;
    return *this;
  }
  friend Vec2 operator+(Vec2 a, Vec2 b) { return {a.x + b.x, a.y + b.y}; }
  friend Vec2 operator-(Vec2 a, Vec2 b) { return {a.x - b.x, a.y - b.y}; }
  friend Vec2 operator-(Vec2 a) { return {-a.x, -a.y}; }
  friend Vec2 operator*(Vec2 a, double f) { return {a.x * f, a.y * f}; }
  friend Vec2 operator*(double f, Vec2 a) { return {a.x * f, a.y * f}; }
  friend Vec2 operator/(Vec2 a, double f) { return {a.x / f, a.y / f}; }
  friend bool operator==(Vec2 a, Vec2 b) { return a.x == b.x && a.y == b.y; }
};

inline double dot(Vec2 a, Vec2 b) {
  return a.x * b.x + a.y * b.y;
}
// z component of a x b: positive when b lies to the left of a.
inline double cross(Vec2 a, Vec2 b) {
  return a.x * b.y - a.y * b.x;
}
inline double norm(Vec2 a) {
  return std::hypot(a.x, a.y);
}
inline double distance(Vec2 a, Vec2 b) {
  return norm(a - b);
}
// `a` turned a quarter to the left.
inline Vec2 leftOf(Vec2 a) {
  return {-a.y, a.x};
}
// Unit vector along `a`; (0, 0) stays (0, 0).
inline Vec2 unit(Vec2 a) {
  const double n = norm(a);
  return n > 0.0 ? a / n : a;
}
inline bool isFinite(Vec2 a) {
  return std::isfinite(a.x) && std::isfinite(a.y);
}

// Point p goes to (xx p.x + xy p.y + dx, yx p.x + yy p.y + dy).
struct Affine2 {
  double xx = 1.0, xy = 0.0, yx = 0.0, yy = 1.0;
  double dx = 0.0, dy = 0.0;

  Vec2 point(Vec2 p) const { return {xx * p.x + xy * p.y + dx, yx * p.x + yy * p.y + dy}; }
  Vec2 vector(Vec2 v) const { return {xx * v.x + xy * v.y, yx * v.x + yy * v.y}; }
  double determinant() const { return xx * yy - xy * yx; }
  // True for a rotation or mirror with one scale: circles stay circles.
  bool isSimilarity() const {
    const double scale = std::hypot(xx, yx);
    const double bound = 1e-12 * scale;
    const double sign = determinant() < 0.0 ? -1.0 : 1.0;
    return std::abs(yy - sign * xx) <= bound && std::abs(xy + sign * yx) <= bound;
  }

  static Affine2 translation(Vec2 v) { return {1.0, 0.0, 0.0, 1.0, v.x, v.y}; }
  static Affine2 scaling(double fx, double fy) { return {fx, 0.0, 0.0, fy, 0.0, 0.0}; }
  static Affine2 rotation(double angle) {
    const double c = std::cos(angle), s = std::sin(angle);
    return {c, -s, s, c, 0.0, 0.0};
  }
};

// First `inner`, then `outer`.
inline Affine2 operator*(const Affine2& outer, const Affine2& inner) {
  Affine2 r;
  r.xx = outer.xx * inner.xx + outer.xy * inner.yx;
  r.xy = outer.xx * inner.xy + outer.xy * inner.yy;
  r.yx = outer.yx * inner.xx + outer.yy * inner.yx;
  r.yy = outer.yx * inner.xy + outer.yy * inner.yy;
  const Vec2 d = outer.point({inner.dx, inner.dy});
  r.dx = d.x;
  r.dy = d.y;
  return r;
}

// Axis-parallel box; empty until the first include().
struct Box {
  Vec2 low{HUGE_VAL, HUGE_VAL};
  Vec2 high{-HUGE_VAL, -HUGE_VAL};

  bool isEmpty() const { return low.x > high.x; }
  double width() const { return isEmpty() ? 0.0 : high.x - low.x; }
  double height() const { return isEmpty() ? 0.0 : high.y - low.y; }
  void include(Vec2 p) {
    low = {std::fmin(low.x, p.x), std::fmin(low.y, p.y)};
    high = {std::fmax(high.x, p.x), std::fmax(high.y, p.y)};
  }
  void include(const Box& b) {
    if (b.isEmpty()) return;
    include(b.low);
    include(b.high);
  }
};

}  // namespace kf::curve
