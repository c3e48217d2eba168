// Tridiagonal linear systems, open and cyclic.
// No units here.
#include "core/numeric/tridiagonal.h"

#include <cassert>
#include <cstddef>

namespace kf::numeric {

std::vector<double> solveTridiagonal(const std::vector<double>& lower, const std::vector<double>& diagonal,
                                     const std::vector<double>& upper, const std::vector<double>& right) {
  const std::size_t n = diagonal.size();
  assert(n >= 1 && lower.size() == n && upper.size() == n && right.size() == n);
  std::vector<double> gamma(n), x(n);
  double beta = diagonal[0];
  x[0] = right[0] / beta;
  for (std::size_t i = 1; i < n; ++i) {
    gamma[i] = upper[i - 1] / beta;
    beta = diagonal[i] - lower[i] * gamma[i];
    x[i] = (right[i] - lower[i] * x[i - 1]) / beta;
  }
  for (std::size_t i = n - 1; i-- > 0;) x[i] -= gamma[i + 1] * x[i + 1];
  return x;
}

std::vector<double> solveCyclicTridiagonal(const std::vector<double>& lower,
                                           const std::vector<double>& diagonal,
                                           const std::vector<double>& upper,
                                           const std::vector<double>& right) {
  const std::size_t n = diagonal.size();
  assert(n >= 3);
  // A = B + w z^T with w = (g, 0.., upper_last), z = (1, 0.., lower_first / g).
  const double corner = upper[n - 1], first = lower[0];
  const double g = -diagonal[0];
  std::vector<double> changed = diagonal;
  changed[0] -= g;
  changed[n - 1] -= corner * first / g;
  std::vector<double> w(n, 0.0);
  w[0] = g;
  w[n - 1] = corner;
  std::vector<double> y = solveTridiagonal(lower, changed, upper, right);
  const std::vector<double> p = solveTridiagonal(lower, changed, upper, w);
  const double factor = (y[0] + first * y[n - 1] / g) / (1.0 + p[0] + first * p[n - 1] / g);
  for (std::size_t i = 0; i < n; ++i) y[i] -= factor * p[i];
  return y;
}

}  // namespace kf::numeric
