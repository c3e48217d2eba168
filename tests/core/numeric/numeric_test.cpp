// Quadrature, roots and tridiagonal systems.
// No units here.
#include <gtest/gtest.h>

#include <cmath>
#include <random>
#include <vector>

#include "core/numeric/gauss_legendre.h"
#include "core/numeric/roots.h"
#include "core/numeric/tridiagonal.h"
#include "tests/support/random_spline.h"

namespace kf::numeric {
namespace {

using testing::uniform;

TEST(Gauss10, IsExactToDegreeNineteenAndNotBeyond) {
  for (int degree = 0; degree <= 19; ++degree) {
    const double exact = (std::pow(2.0, degree + 1) - std::pow(-0.5, degree + 1)) / (degree + 1);
    const double sum = gauss10([degree](double x) { return std::pow(x, degree); }, -0.5, 2.0);
    EXPECT_NEAR(sum, exact, 1e-14 * std::abs(exact)) << degree;
  }
  // The error on x^20 over [-1, 1] is 2^21 (10!)^4 / (21 (20!)^2), from the error term of the rule (DLMF
  // 3.5.20, from memory).
  double factor = 2.0 / 21.0;
  for (int i = 1; i <= 10; ++i) factor *= 4.0 * i * i / ((10.0 + i) * (10.0 + i));
  const double sum = gauss10([](double x) { return std::pow(x, 20); }, -1.0, 1.0);
  EXPECT_NEAR(2.0 / 21.0 - sum, factor, 1e-15);
}

TEST(FindRoot, MeetsItsToleranceFromEitherSide) {
  const auto check = [](auto f, double a, double b, double root) {
    int calls = 0;
    const auto counted = [&](double x) {
      ++calls;
      return f(x);
    };
    EXPECT_NEAR(findRoot(counted, a, b, 1e-13), root, 1e-12 * (1 + std::abs(root)));
    EXPECT_LE(calls, 202);
    EXPECT_NEAR(findRoot(f, b, a, 1e-13), root, 1e-12 * (1 + std::abs(root)));
  };
  check([](double x) { return x * x - 2; }, 0, 2, std::sqrt(2.0));
  check([](double x) { return std::cos(x); }, 0, 3, std::acos(0.0));
  check([](double x) { return std::exp(x) - 1e5; }, 0, 100, std::log(1e5));
  check([](double x) { return x < 0.7 ? -1.0 : 1e9; }, 0, 1, 0.7);
  check([](double x) { return std::cbrt(x - 0.3); }, -1, 1, 0.3);
  check([](double x) { return std::pow(x - 0.25, 9); }, 0, 1, 0.25);
  check([](double x) { return x - 1e6; }, 0, 3e6, 1e6);
  check([](double x) { return 1e-300 * (x - 0.5); }, 0, 1, 0.5);
}

TEST(FindRoot, TakesAnEndThatIsARoot) {
  EXPECT_EQ(findRoot([](double x) { return x; }, 0.0, 1.0, 1e-12), 0.0);
  EXPECT_EQ(findRoot([](double x) { return x - 1; }, 0.0, 1.0, 1e-12), 1.0);
}

// Residuals of seeded, diagonally dominant systems.
TEST(Tridiagonal, SolvesOpenAndCyclicSystems) {
  std::mt19937_64 random(7);
  for (std::size_t n : {1u, 2u, 3u, 4u, 10u, 1000u}) {
    std::vector<double> lower(n), diagonal(n), upper(n), right(n);
    for (std::size_t i = 0; i < n; ++i) {
      lower[i] = uniform(random, -1, 1);
      upper[i] = uniform(random, -1, 1);
      diagonal[i] = (random() % 2 == 0 ? 1.0 : -1.0) *
                    (std::abs(lower[i]) + std::abs(upper[i]) + uniform(random, 0.1, 2));
      right[i] = uniform(random, -10, 10);
    }
    for (bool cyclic : {false, true}) {
      if (cyclic && n < 3) continue;
      const std::vector<double> x = cyclic ? solveCyclicTridiagonal(lower, diagonal, upper, right)
                                           : solveTridiagonal(lower, diagonal, upper, right);
      for (std::size_t i = 0; i < n; ++i) {
        const double before = i > 0 ? x[i - 1] : (cyclic ? x[n - 1] : 0.0);
        const double after = i + 1 < n ? x[i + 1] : (cyclic ? x[0] : 0.0);
        EXPECT_NEAR(lower[i] * before + diagonal[i] * x[i] + upper[i] * after, right[i], 1e-11);
      }
    }
  }
}

}  // namespace
}  // namespace kf::numeric
