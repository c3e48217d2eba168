// Exact rational splines for trigonometric polynomials, and polynomial Beziers from powers.
// Lengths in mm, angles in rad.
#pragma once

#include <cmath>
#include <complex>
#include <cstddef>
#include <vector>

#include "core/curve/curve.h"

namespace kf::testing {

// One term: (x cos(k t) + ..., as complex amplitudes: the point is the sum of
// cosine[k] cos(k t) + sine[k] sin(k t), index k from 0.
struct TrigCurve {
  std::vector<curve::Vec2> cosine, sine;

  curve::Vec2 point(double t) const {
    curve::Vec2 p;
    for (std::size_t k = 0; k < cosine.size(); ++k) {
      const double a = static_cast<double>(k) * t;
      p += std::cos(a) * cosine[k] + std::sin(a) * sine[k];
    }
    return p;
  }
};

inline std::vector<std::complex<double>> multiply(const std::vector<std::complex<double>>& a,
                                                  const std::vector<std::complex<double>>& b) {
  std::vector<std::complex<double>> r(a.size() + b.size() - 1);
  for (std::size_t i = 0; i < a.size(); ++i)
    for (std::size_t j = 0; j < b.size(); ++j) r[i + j] += a[i] * b[j];
  return r;
}

// Bernstein coefficients on [0, 1] of a polynomial given by its powers: b_i = sum_j C(i,j) / C(n,j) a_j.
inline std::vector<double> bernstein(const std::vector<double>& powers) {
  const std::size_t n = powers.size() - 1;
  const auto choose = [](std::size_t a, std::size_t b) {
    double c = 1.0;
    for (std::size_t i = 0; i < b; ++i) c = c * static_cast<double>(a - i) / static_cast<double>(i + 1);
    return c;
  };
  std::vector<double> b(n + 1, 0.0);
  for (std::size_t i = 0; i <= n; ++i)
    for (std::size_t j = 0; j <= i; ++j) b[i] += choose(i, j) / choose(n, j) * powers[j];
  return b;
}

inline curve::Nurbs bezier(std::vector<curve::Vec2> poles, std::vector<double> weights = {}) {
  const std::size_t n = poles.size();
  std::vector<double> knots(n, 0.0);
  knots.insert(knots.end(), n, 1.0);
  return *curve::makeNurbs(static_cast<int>(n) - 1, knots, std::move(poles), std::move(weights));
}

inline curve::Nurbs bezierFromPowers(const std::vector<double>& x, const std::vector<double>& y) {
  const std::vector<double> bx = bernstein(x), by = bernstein(y);
  std::vector<curve::Vec2> poles;
  for (std::size_t i = 0; i < bx.size(); ++i) poles.push_back({bx[i], by[i]});
  return bezier(poles);
}

// The stretch from t0 to t1 (|t1 - t0| < pi) as one rational Bezier. With z = tan((t - middle)/2),
// exp(i k t) = exp(i k middle) (1 + i z)^(2k) / (1 + z^2)^k; z runs from -z1 to z1 with z1 = tan((t1 -
// t0)/4).
inline curve::Nurbs rationalStretch(const TrigCurve& curve, double t0, double t1) {
  using C = std::complex<double>;
  const std::size_t n = curve.cosine.size() - 1;
  const double middle = 0.5 * (t0 + t1), z1 = std::tan(0.25 * (t1 - t0));
  // z = z1 (2 w - 1), w from 0 to 1: 1 + i z as a polynomial in w.
  const std::vector<C> forward = {C(1.0, -z1), C(0.0, 2.0 * z1)}, backward = {C(1.0, z1), C(0.0, -2.0 * z1)};
  const std::vector<C> norm = multiply(forward, backward);  // 1 + z^2
  std::vector<double> x(2 * n + 1, 0.0), y(2 * n + 1, 0.0), w(2 * n + 1, 0.0);
  for (std::size_t k = 0; k <= n; ++k) {
    std::vector<C> term = {std::polar(1.0, static_cast<double>(k) * middle)};
    for (std::size_t i = 0; i < k; ++i) term = multiply(term, multiply(forward, forward));
    for (std::size_t i = k; i < n; ++i) term = multiply(term, norm);
    for (std::size_t j = 0; j < term.size(); ++j) {
      x[j] += curve.cosine[k].x * term[j].real() + curve.sine[k].x * term[j].imag();
      y[j] += curve.cosine[k].y * term[j].real() + curve.sine[k].y * term[j].imag();
    }
  }
  std::vector<C> weight = {C(1.0, 0.0)};
  for (std::size_t i = 0; i < n; ++i) weight = multiply(weight, norm);
  for (std::size_t j = 0; j < weight.size(); ++j) w[j] = weight[j].real();
  const std::vector<double> bx = bernstein(x), by = bernstein(y), bw = bernstein(w);
  std::vector<curve::Vec2> poles;
  for (std::size_t i = 0; i < bx.size(); ++i) poles.push_back({bx[i] / bw[i], by[i] / bw[i]});
  return bezier(poles, bw);
}

inline TrigCurve cardioid(double a) {  // r = a (1 + cos t)
  return {{{a / 2, 0}, {a, 0}, {a / 2, 0}}, {{0, 0}, {0, a}, {0, a / 2}}};
}
inline TrigCurve limacon() {  // r = 1 + 2 cos t
  return {{{1, 0}, {1, 0}, {1, 0}}, {{0, 0}, {0, 1}, {0, 1}}};
}
inline TrigCurve astroid(double a) {  // a (cos^3, sin^3) = a/4 (3 cos t + cos 3t, 3 sin t - sin 3t)
  return {{{0, 0}, {0.75 * a, 0}, {0, 0}, {0.25 * a, 0}}, {{0, 0}, {0, 0.75 * a}, {0, 0}, {0, -0.25 * a}}};
}
inline TrigCurve deltoid() {
  return {{{0, 0}, {2, 0}, {1, 0}}, {{0, 0}, {0, 2}, {0, -1}}};
}
inline TrigCurve nephroid() {
  return {{{0, 0}, {3, 0}, {0, 0}, {-1, 0}}, {{0, 0}, {0, 3}, {0, 0}, {0, -1}}};
}
inline TrigCurve ellipse(double a, double b) {
  return {{{0, 0}, {a, 0}}, {{0, 0}, {0, b}}};
}

}  // namespace kf::testing
