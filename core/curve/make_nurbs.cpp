// Building checked splines: from poles, periodic, and through points.
// Lengths in mm; parameters are dimensionless.
#include <algorithm>
#include <array>
#include <cmath>
#include <string>

#include "core/curve/nurbs.h"
#include "core/numeric/tridiagonal.h"

namespace kf::curve {
namespace {

Error invalid(std::string message) {
  return {ErrorCode::invalidArgument, std::move(message)};
}

bool allFinite(const std::vector<Vec2>& points) {
  return std::all_of(points.begin(), points.end(), [](Vec2 p) { return isFinite(p); });
}

Result<void> checkKnots(int degree, const std::vector<double>& knots, std::size_t poles) {
  const auto p = static_cast<std::size_t>(degree);
  if (knots.size() != poles + p + 1) {
    return invalid("a spline of degree " + std::to_string(degree) + " with " + std::to_string(poles) +
                   " poles needs " + std::to_string(poles + p + 1) + " knots, not " +
                   std::to_string(knots.size()));
  }
  for (std::size_t i = 0; i < knots.size(); ++i) {
    if (!std::isfinite(knots[i]))
      return invalid("knot " + std::to_string(i + 1) + " of a spline is not finite");
    if (i > 0 && knots[i] < knots[i - 1])
      return invalid("knot " + std::to_string(i + 1) + " of a spline is less than the one before");
  }
  if (!(knots[p] < knots[poles])) return invalid("the knots of a spline leave no parameter range");
  // A knot repeated more than degree times inside the domain would tear the curve apart.
  for (std::size_t i = p + 1; i + p < poles; ++i) {
    if (knots[i] > knots[p] && knots[i + p] < knots[poles] && knots[i] == knots[i + p]) {
      return invalid(
          "an inner knot of a spline is repeated more than degree times, which tears the curve apart");
    }
  }
  return {};
}

// Derivatives at the points of the C2 cubic Hermite spline, one coordinate. `closed`: h and y wrap around.
std::vector<double> slopesOpen(const std::vector<double>& h, const std::vector<double>& y,
                               const double* start, const double* end) {
  const std::size_t n = y.size();
  std::vector<double> lower(n, 0.0), diagonal(n, 1.0), upper(n, 0.0), right(n, 0.0);
  for (std::size_t i = 1; i + 1 < n; ++i) {
    lower[i] = h[i];
    diagonal[i] = 2.0 * (h[i - 1] + h[i]);
    upper[i] = h[i - 1];
    right[i] = 3.0 * (h[i] * (y[i] - y[i - 1]) / h[i - 1] + h[i - 1] * (y[i + 1] - y[i]) / h[i]);
  }
  // Without a tangent the second derivative vanishes at the end: 2 m0 + m1 = 3 (y1 - y0) / h0.
  if (start != nullptr) {
    right[0] = *start;
  } else {
    diagonal[0] = 2.0;
    upper[0] = 1.0;
    right[0] = 3.0 * (y[1] - y[0]) / h[0];
  }
  if (end != nullptr) {
    right[n - 1] = *end;
  } else {
    diagonal[n - 1] = 2.0;
    lower[n - 1] = 1.0;
    right[n - 1] = 3.0 * (y[n - 1] - y[n - 2]) / h[n - 2];
  }
  return numeric::solveTridiagonal(lower, diagonal, upper, right);
}

std::vector<double> slopesClosed(const std::vector<double>& h, const std::vector<double>& y) {
  const std::size_t n = h.size();  // y has n + 1 entries, the last equal to the first
  std::vector<double> lower(n), diagonal(n), upper(n), right(n);
  for (std::size_t i = 0; i < n; ++i) {
    const std::size_t before = (i + n - 1) % n;
    lower[i] = h[i];
    diagonal[i] = 2.0 * (h[before] + h[i]);
    upper[i] = h[before];
    right[i] = 3.0 * (h[i] * (y[i] - y[before]) / h[before] + h[before] * (y[i + 1] - y[i]) / h[i]);
  }
  std::vector<double> m = numeric::solveCyclicTridiagonal(lower, diagonal, upper, right);
  m.push_back(m.front());
  return m;
}

// Blossom of the cubic with Bezier points b on [low, high].
Vec2 cubicBlossom(std::array<Vec2, 4> b, double low, double high, const double* u) {
  for (std::size_t r = 0; r < 3; ++r) {
    const double alpha = (u[r] - low) / (high - low);
    for (std::size_t i = 0; i + r < 3; ++i) b[i] = (1.0 - alpha) * b[i] + alpha * b[i + 1];
  }
  return b[0];
}

}  // namespace

Result<Nurbs> makeNurbs(int degree, std::vector<double> knots, std::vector<Vec2> poles,
                        std::vector<double> weights) {
  if (degree < 1 || degree > kMaxDegree) {
    return invalid("a spline's degree must be 1 to " + std::to_string(kMaxDegree) + ", not " +
                   std::to_string(degree));
  }
  if (poles.size() < static_cast<std::size_t>(degree) + 1) {
    return invalid("a spline of degree " + std::to_string(degree) + " needs at least " +
                   std::to_string(degree + 1) + " poles, not " + std::to_string(poles.size()));
  }
  if (!allFinite(poles)) return invalid("a pole of a spline is not finite");
  if (auto checked = checkKnots(degree, knots, poles.size()); !checked) return checked.error();
  if (!weights.empty() && weights.size() != poles.size()) {
    return invalid("a spline with " + std::to_string(poles.size()) + " poles has " +
                   std::to_string(weights.size()) + " weights");
  }
  for (double w : weights) {
    if (!std::isfinite(w) || !(w > 0.0)) return invalid("a weight of a spline is not positive");
  }
  if (std::all_of(weights.begin(), weights.end(), [&weights](double w) { return w == weights.front(); }))
    weights.clear();
  return Nurbs{degree, std::move(knots), std::move(poles), std::move(weights)};
}

Result<Nurbs> makePeriodicNurbs(int degree, std::vector<double> knots, std::vector<Vec2> poles,
                                std::vector<double> weights) {
  if (degree < 1 || degree > kMaxDegree)
    return makeNurbs(degree, std::move(knots), std::move(poles), std::move(weights));
  const std::size_t n = poles.size(), p = static_cast<std::size_t>(degree);
  if (n < 2 || knots.size() != n + 1 || (!weights.empty() && weights.size() != n)) {
    return invalid("a periodic spline needs one more knot than poles, and as many weights as poles or none");
  }
  const double period = knots.back() - knots.front();
  if (!(period > 0.0)) return invalid("the knots of a periodic spline leave no parameter range");
  // U[i] for i = -p .. n + p, and poles P[i mod n] for i = -p .. n - 1.
  std::vector<double> allKnots, allWeights;
  std::vector<Vec2> allPoles;
  const auto wrap = [n](std::ptrdiff_t i) {
    const auto m = static_cast<std::ptrdiff_t>(n);
    return static_cast<std::size_t>(((i % m) + m) % m);
  };
  for (std::ptrdiff_t i = -static_cast<std::ptrdiff_t>(p); i <= static_cast<std::ptrdiff_t>(n + p); ++i) {
    const std::size_t j = wrap(i);
    const double turns = std::floor(static_cast<double>(i) / static_cast<double>(n));
    allKnots.push_back(knots[j] + turns * period);
    if (i >= static_cast<std::ptrdiff_t>(n)) continue;
    allPoles.push_back(poles[j]);
    if (!weights.empty()) allWeights.push_back(weights[j]);
  }
  auto open = makeNurbs(degree, std::move(allKnots), std::move(allPoles), std::move(allWeights));
  if (!open) return open;
  return nurbsTrimmed(*open, knots.front(), knots.back());
}

Result<Nurbs> interpolateCubic(const std::vector<Vec2>& points, const Vec2* startTangent,
                               const Vec2* endTangent) {
  const std::size_t n = points.size();
  if (n < 2) return invalid("a curve through points needs at least two of them");
  if (!allFinite(points)) return invalid("a point of a curve is not finite");
  std::vector<double> h(n - 1), t(n, 0.0), x(n), y(n);
  for (std::size_t i = 0; i < n; ++i) {
    x[i] = points[i].x;
    y[i] = points[i].y;
    if (i + 1 == n) break;
    h[i] = distance(points[i], points[i + 1]);
    if (!(h[i] > 0.0))
      return invalid("points " + std::to_string(i + 1) + " and " + std::to_string(i + 2) +
                     " of a curve are the same");
    t[i + 1] = t[i] + h[i];
  }
  const bool closed =
      n >= 4 && points.front() == points.back() && startTangent == nullptr && endTangent == nullptr;
  const auto slopes = [&](const std::vector<double>& values, bool isX) {
    if (closed) return slopesClosed(h, values);
    const double sx = startTangent == nullptr ? 0.0 : (isX ? unit(*startTangent).x : unit(*startTangent).y);
    const double ex = endTangent == nullptr ? 0.0 : (isX ? unit(*endTangent).x : unit(*endTangent).y);
    return slopesOpen(h, values, startTangent == nullptr ? nullptr : &sx,
                      endTangent == nullptr ? nullptr : &ex);
  };
  const std::vector<double> mx = slopes(x, true), my = slopes(y, false);

  Nurbs spline;
  spline.knots.assign(3, t.front());
  spline.knots.insert(spline.knots.end(), t.begin(), t.end());
  spline.knots.insert(spline.knots.end(), 3, t.back());
  for (std::size_t j = 0; j < n + 2; ++j) {
    const std::size_t piece = std::clamp<std::size_t>(j, 2, n) - 2;  // a piece under the support of pole j
    const Vec2 p0 = points[piece], p1 = points[piece + 1];
    const Vec2 m0{mx[piece], my[piece]}, m1{mx[piece + 1], my[piece + 1]};
    const double third = h[piece] / 3.0;
    spline.poles.push_back(cubicBlossom({p0, p0 + third * m0, p1 - third * m1, p1}, t[piece], t[piece + 1],
                                        &spline.knots[j + 1]));
  }
  return spline;
}

}  // namespace kf::curve
