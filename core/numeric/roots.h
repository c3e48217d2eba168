// Roots of functions of one variable inside a bracket.
// No units here.
#pragma once

#include <cmath>
#include <utility>

namespace kf::numeric {

// A zero of f between a and b, by bisection with secant steps (Illinois variant of regula falsi).
//
// Domain    f(a) and f(b) have opposite signs, or one is zero; f is continuous.
// Accuracy  the returned x lies in a bracket no wider than `tolerance` + 4 ulp.
// Cost      about 10 evaluations for smooth functions, never more than 200.
template <class Function>
double findRoot(const Function& f, double a, double b, double tolerance) {
  double fa = f(a), fb = f(b);
  if (fa == 0.0) return a;
  if (fb == 0.0) return b;
  for (int step = 0; step < 200; ++step) {
    const double width = std::abs(b - a);
    if (width <= tolerance + 4e-16 * (std::abs(a) + std::abs(b))) break;
    double x = (step % 3 == 2) ? 0.5 * (a + b) : b - fb * (b - a) / (fb - fa);
    const double low = std::fmin(a, b), high = std::fmax(a, b);
    if (!(x > low && x < high)) x = 0.5 * (a + b);
    const double fx = f(x);
    if (fx == 0.0) return x;
    if ((fx < 0.0) == (fb < 0.0)) {
      fa *= 0.5;  // the same end moved twice: pull the secant over
    } else {
      a = b;
      fa = fb;
    }
    b = x;
    fb = fx;
  }
  return std::abs(fa) < std::abs(fb) ? a : b;
}

}  // namespace kf::numeric
