// Symmetric positive definite systems with three off-diagonals on each side.
// No units here.
#include "core/numeric/banded.h"

#include <algorithm>

namespace kf::numeric {

void solveBanded(std::vector<BandRow>& a, std::vector<double>& x) {
  const std::size_t n = a.size();
  for (std::size_t i = 0; i < n; ++i) {
    double& pivot = a[i][0];
    if (!(pivot > 0.0)) pivot = 1e300;
    const std::size_t reach = std::min(kBand, n - 1 - i);
    BandRow scaled{};
    for (std::size_t k = 1; k <= reach; ++k) scaled[k] = a[i][k] / pivot;
    for (std::size_t k = 1; k <= reach; ++k) {
      for (std::size_t m = k; m <= reach; ++m) a[i + k][m - k] -= scaled[k] * a[i][m];
      x[i + k] -= scaled[k] * x[i];
    }
    for (std::size_t k = 1; k <= reach; ++k) a[i][k] = scaled[k];
    x[i] /= pivot;
  }
  for (std::size_t i = n; i-- > 0;) {
    for (std::size_t k = 1; k <= std::min(kBand, n - 1 - i); ++k) x[i] -= a[i][k] * x[i + k];
  }
}

}  // namespace kf::numeric
