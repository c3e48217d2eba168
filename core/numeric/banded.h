// Symmetric positive definite systems with three off-diagonals on each side.
// No units here.
#pragma once

#include <array>
#include <cstddef>
#include <vector>

namespace kf::numeric {

// Row i holds the diagonal and the entries (i, i+1), (i, i+2), (i, i+3).
inline constexpr std::size_t kBand = 3;
using BandRow = std::array<double, kBand + 1>;

// Factorises a = L D L^T in place and solves for `x`, which holds the right side and then the answer.
//
// Domain    a.size() = x.size() >= 1; positive definite up to rounding: a pivot that is not positive is
// replaced by a
//           large number, which leaves its unknown where it is.
// Cost      O(n), no allocation.
void solveBanded(std::vector<BandRow>& a, std::vector<double>& x);

}  // namespace kf::numeric
