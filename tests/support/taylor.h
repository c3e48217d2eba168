// Truncated Taylor arithmetic: a value with its derivatives to the third, independent of the code under test.
// No units here.
#pragma once

#include <array>
#include <cmath>
#include <cstddef>

#include "core/curve/curve.h"

namespace kf::testing {

// Coefficients of 1, h, h^2, h^3 (derivatives divided by factorials).
struct Taylor {
  std::array<double, 4> c{};

  Taylor(double value) : c{value, 0.0, 0.0, 0.0} {}
  static Taylor variable(double at) {
    Taylor t(at);
    t.c[1] = 1.0;
    return t;
  }
  friend Taylor operator+(Taylor a, const Taylor& b) {
    for (std::size_t i = 0; i < 4; ++i) a.c[i] += b.c[i];
    return a;
  }
  friend Taylor operator-(Taylor a, const Taylor& b) {
    for (std::size_t i = 0; i < 4; ++i) a.c[i] -= b.c[i];
    return a;
  }
  friend Taylor operator*(const Taylor& a, const Taylor& b) {
    Taylor r(0.0);
    for (std::size_t i = 0; i < 4; ++i)
      for (std::size_t j = 0; i + j < 4; ++j) r.c[i + j] += a.c[i] * b.c[j];
    return r;
  }
  friend Taylor operator/(const Taylor& a, const Taylor& b) {
    Taylor r(0.0);
    for (std::size_t i = 0; i < 4; ++i) {
      double rest = a.c[i];
      for (std::size_t j = 0; j < i; ++j) rest -= r.c[j] * b.c[i - j];
      r.c[i] = rest / b.c[0];
    }
    return r;
  }
};

// f(x) from f and its first three derivatives at x's value.
inline Taylor compose(const Taylor& x, double f0, double f1, double f2, double f3) {
  Taylor h = x;
  h.c[0] = 0.0;
  const Taylor h2 = h * h;
  return Taylor(f0) + Taylor(f1) * h + Taylor(f2 / 2.0) * h2 + Taylor(f3 / 6.0) * h2 * h;
}
inline Taylor sin(const Taylor& x) {
  const double s = std::sin(x.c[0]), c = std::cos(x.c[0]);
  return compose(x, s, c, -s, -c);
}
inline Taylor cos(const Taylor& x) {
  const double s = std::sin(x.c[0]), c = std::cos(x.c[0]);
  return compose(x, c, -s, -c, s);
}
inline Taylor exp(const Taylor& x) {
  const double e = std::exp(x.c[0]);
  return compose(x, e, e, e, e);
}
inline Taylor sqrt(const Taylor& x) {
  const double v = x.c[0], r = std::sqrt(v);
  return compose(x, r, 0.5 / r, -0.25 / (v * r), 0.375 / (v * v * r));
}
inline Taylor cosh(const Taylor& x) {
  return (exp(x) + exp(Taylor(0.0) - x)) / Taylor(2.0);
}
inline Taylor tanh(const Taylor& x) {
  const Taylor up = exp(x), down = exp(Taylor(0.0) - x);
  return (up - down) / (up + down);
}

// The jet of a formula: `formula(Taylor t)` returns a pair {x, y}.
template <class Formula>
curve::Jet jetOf(const Formula& formula, double t) {
  const auto [x, y] = formula(Taylor::variable(t));
  return {{x.c[0], y.c[0]}, {x.c[1], y.c[1]}, {2.0 * x.c[2], 2.0 * y.c[2]}, {6.0 * x.c[3], 6.0 * y.c[3]}};
}

}  // namespace kf::testing
