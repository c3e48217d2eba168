// Gauss-Legendre quadrature with ten points.
// No units here.
#pragma once

#include <array>
#include <cstddef>

namespace kf::numeric {

// Positive abscissae on [-1, 1] and their weights. Source: DLMF 3.5(v); recomputed with mpmath to 20 digits.
inline constexpr std::array<double, 5> kGauss10Nodes = {0.14887433898163121088, 0.43339539412924719080,
                                                        0.67940956829902440623, 0.86506336668898451073,
                                                        0.97390652851717172008};
inline constexpr std::array<double, 5> kGauss10Weights = {0.29552422471475287017, 0.26926671930999635509,
                                                          0.21908636251598204400, 0.14945134915058059315,
                                                          0.06667134430868813759};

// Integral of f from a to b; exact for polynomials up to degree 19. Cost: ten evaluations.
template <class Function>
double gauss10(const Function& f, double a, double b) {
  const double middle = 0.5 * (a + b), half = 0.5 * (b - a);
  double sum = 0.0;
  for (std::size_t i = 0; i < kGauss10Nodes.size(); ++i) {
    const double d = half * kGauss10Nodes[i];
    sum += kGauss10Weights[i] * (f(middle - d) + f(middle + d));
  }
  return half * sum;
}

}  // namespace kf::numeric
