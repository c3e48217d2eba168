// Tridiagonal linear systems, open and cyclic.
// No units here.
#pragma once

#include <vector>

namespace kf::numeric {

// Solves lower[i] x[i-1] + diagonal[i] x[i] + upper[i] x[i+1] = right[i] by elimination without pivoting.
// Domain    equal sizes >= 1, diagonally dominant; lower[0] and upper.back() are not used.
// Cost      O(n).
std::vector<double> solveTridiagonal(const std::vector<double>& lower, const std::vector<double>& diagonal,
                                     const std::vector<double>& upper, const std::vector<double>& right);

// The same with indices modulo n: lower[0] couples to x.back(), upper.back() to x.front().
// Domain    n >= 3, diagonally dominant.  Source: Sherman-Morrison on the open system.
std::vector<double> solveCyclicTridiagonal(const std::vector<double>& lower,
                                           const std::vector<double>& diagonal,
                                           const std::vector<double>& upper,
                                           const std::vector<double>& right);

}  // namespace kf::numeric
