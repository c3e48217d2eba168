// Evaluation and cutting of B-splines.
// Lengths in mm; parameters are dimensionless.
#include "core/curve/nurbs.h"

#include <algorithm>
#include <cassert>
#include <cmath>

namespace kf::curve {
namespace {

using Local = std::array<Homogeneous, kMaxDegree + 1>;

Homogeneous homogeneousPole(const Nurbs& nurbs, std::size_t i) {
  const double w = nurbs.weights.empty() ? 1.0 : nurbs.weights[i];
  return {nurbs.poles[i].x * w, nurbs.poles[i].y * w, w};
}

Local localPoles(const Nurbs& nurbs, std::size_t span) {
  Local local;
  const auto p = static_cast<std::size_t>(nurbs.degree);
  for (std::size_t i = 0; i <= p; ++i) local[i] = homogeneousPole(nurbs, span - p + i);
  return local;
}

// De Boor's scheme for points c[0..degree] of the piece on span k, with its own argument in each round.
// The knots of round r, point i are U[i+k-degree] and U[i+1+k-r].
template <class Argument>
Homogeneous deBoor(const std::vector<double>& knots, std::size_t k, std::size_t degree, Local c,
                   const Argument& argument) {
  for (std::size_t r = 1; r <= degree; ++r) {
    const double u = argument(r - 1);
    for (std::size_t i = degree; i >= r; --i) {
      const double low = knots[i + k - degree], high = knots[i + 1 + k - r];
      const double alpha = (u - low) / (high - low);
      c[i] = (1.0 - alpha) * c[i - 1] + alpha * c[i];
    }
  }
  return c[degree];
}

// Points of the derivative of the piece: degree - 1, one fewer.
void differentiate(const std::vector<double>& knots, std::size_t k, std::size_t degree, Local& c) {
  for (std::size_t i = 0; i < degree; ++i) {
    const double width = knots[i + k + 1] - knots[i + k + 1 - degree];
    c[i] = (static_cast<double>(degree) / width) * (c[i + 1] - c[i]);
  }
}

// Largest value of direction . point over a Bezier piece, by bisection with the convex hull as the bound.
double largestAlong(std::vector<Homogeneous> piece, Vec2 direction, double best, double slack) {
  const auto value = [direction](Homogeneous h) { return (direction.x * h.x + direction.y * h.y) / h.w; };
  std::vector<std::vector<Homogeneous>> open{std::move(piece)};
  for (int budget = 4000; budget > 0 && !open.empty(); --budget) {
    std::vector<Homogeneous> right = std::move(open.back());
    open.pop_back();
    best = std::max({best, value(right.front()), value(right.back())});
    double hull = -HUGE_VAL;
    for (Homogeneous h : right) hull = std::max(hull, value(h));
    if (hull <= best + slack) continue;
    std::vector<Homogeneous> left;
    const std::size_t n = right.size();
    left.reserve(n);
    for (std::size_t r = 0; r < n; ++r) {
      left.push_back(right.front());
      for (std::size_t i = 0; i + 1 < n - r; ++i) right[i] = 0.5 * (right[i] + right[i + 1]);
    }
    // What remains in `right` is, read from the front, the right half's points.
    open.push_back(std::move(left));
    open.push_back(std::move(right));
  }
  return best;
}

}  // namespace

std::size_t findSpan(const Nurbs& nurbs, double u, Side side) {
  const auto p = static_cast<std::size_t>(nurbs.degree);
  const std::size_t n = nurbs.poles.size();
  const auto begin = nurbs.knots.begin();
  const auto low = begin + static_cast<std::ptrdiff_t>(p);
  const auto high = begin + static_cast<std::ptrdiff_t>(n);
  const auto above = side == Side::right ? std::upper_bound(low, high, u) : std::lower_bound(low, high, u);
  std::ptrdiff_t k = above - begin - 1;
  k = std::clamp(k, static_cast<std::ptrdiff_t>(p), static_cast<std::ptrdiff_t>(n) - 1);
  // At the ends of the domain a repeated knot may leave an empty span: step inward to a real one.
  while (k > static_cast<std::ptrdiff_t>(p) &&
         nurbs.knots[static_cast<std::size_t>(k)] == nurbs.knots[static_cast<std::size_t>(k) + 1])
    --k;
  while (nurbs.knots[static_cast<std::size_t>(k)] == nurbs.knots[static_cast<std::size_t>(k) + 1]) ++k;
  return static_cast<std::size_t>(k);
}

// With the homogeneous curve A = w c, Leibniz gives  w c(r) = A(r) - sum_{i=1..r} C(r,i) w(i) c(r-i).
Jet nurbsJet(const Nurbs& nurbs, double u, Side side) {
  const std::size_t k = findSpan(nurbs, u, side);
  auto degree = static_cast<std::size_t>(nurbs.degree);
  Local c = localPoles(nurbs, k);
  std::array<Homogeneous, 4> a;
  for (std::size_t r = 0; r < 4; ++r) {
    a[r] = deBoor(nurbs.knots, k, degree, c, [u](std::size_t) { return u; });
    if (r == 3) break;
    if (degree == 0) {
      for (std::size_t i = r + 1; i < 4; ++i) a[i] = {0.0, 0.0, 0.0};
      break;
    }
    differentiate(nurbs.knots, k, degree, c);
    --degree;
  }
  const auto vector = [](Homogeneous h) { return Vec2{h.x, h.y}; };
  Jet jet;
  const double w = a[0].w;
  jet.p = vector(a[0]) / w;
  jet.d1 = (vector(a[1]) - a[1].w * jet.p) / w;
  jet.d2 = (vector(a[2]) - 2.0 * a[1].w * jet.d1 - a[2].w * jet.p) / w;
  jet.d3 = (vector(a[3]) - 3.0 * a[1].w * jet.d2 - 3.0 * a[2].w * jet.d1 - a[3].w * jet.p) / w;
  return jet;
}

Homogeneous blossom(const Nurbs& nurbs, std::size_t span, const double* arguments) {
  return deBoor(nurbs.knots, span, static_cast<std::size_t>(nurbs.degree), localPoles(nurbs, span),
                [arguments](std::size_t r) { return arguments[r]; });
}

Nurbs nurbsReversed(const Nurbs& nurbs) {
  Nurbs r = nurbs;
  std::reverse(r.poles.begin(), r.poles.end());
  std::reverse(r.weights.begin(), r.weights.end());
  const double sum = nurbs.knots.front() + nurbs.knots.back();
  std::reverse(r.knots.begin(), r.knots.end());
  for (double& knot : r.knots) knot = sum - knot;
  return r;
}

// The new knot vector is a, the knots strictly inside, b, with a and b clamped. Pole j of the result is the
// blossom of any old piece under its support at (V[j+1] .. V[j+p]): the piece on which V[j+1..j+p+?] has a
// non-empty span.
Nurbs nurbsTrimmed(const Nurbs& nurbs, double a, double b) {
  assert(a < b);
  const auto p = static_cast<std::size_t>(nurbs.degree);
  Nurbs r;
  r.degree = nurbs.degree;
  r.knots.assign(p + 1, a);
  for (double knot : nurbs.knots) {
    if (knot > a && knot < b) r.knots.push_back(knot);
  }
  r.knots.insert(r.knots.end(), p + 1, b);
  const std::size_t count = r.knots.size() - p - 1;
  r.poles.reserve(count);
  for (std::size_t j = 0; j < count; ++j) {
    // A non-empty span of the new knots inside the support [V[j], V[j+p+1]], as central as can be.
    std::size_t best = j;
    double width = -1.0;
    for (std::size_t i = j; i <= j + p; ++i) {
      const double w = r.knots[i + 1] - r.knots[i];
      if (w > width) {
        width = w;
        best = i;
      }
    }
    const double middle = 0.5 * (r.knots[best] + r.knots[best + 1]);
    const Homogeneous h = blossom(nurbs, findSpan(nurbs, middle, Side::right), &r.knots[j + 1]);
    r.poles.push_back(h.point());
    if (!nurbs.weights.empty()) r.weights.push_back(h.w);
  }
  return r;
}

Box nurbsBounds(const Nurbs& nurbs) {
  const auto p = static_cast<std::size_t>(nurbs.degree);
  Box hull;
  for (Vec2 pole : nurbs.poles) hull.include(pole);
  // Far from the origin rounding exceeds the share of the size, and below it halving would never end.
  const double farthest =
      std::max({std::abs(hull.low.x), std::abs(hull.low.y), std::abs(hull.high.x), std::abs(hull.high.y)});
  const double slack = std::max(1e-13 * (hull.width() + hull.height()), 1e-15 * farthest);
  std::array<double, 4> best{-HUGE_VAL, -HUGE_VAL, -HUGE_VAL, -HUGE_VAL};
  const std::array<Vec2, 4> directions = {Vec2{1.0, 0.0}, Vec2{-1.0, 0.0}, Vec2{0.0, 1.0}, Vec2{0.0, -1.0}};
  for (std::size_t k = p; k < nurbs.poles.size(); ++k) {
    const double low = nurbs.knots[k], high = nurbs.knots[k + 1];
    if (!(low < high)) continue;
    std::vector<Homogeneous> bezier(p + 1);
    std::array<double, kMaxDegree> arguments{};
    for (std::size_t i = 0; i <= p; ++i) {
      std::fill_n(arguments.begin(), p - i, low);
      std::fill_n(arguments.begin() + static_cast<std::ptrdiff_t>(p - i), i, high);
      bezier[i] = blossom(nurbs, k, arguments.data());
    }
    for (std::size_t d = 0; d < 4; ++d) best[d] = largestAlong(bezier, directions[d], best[d], slack);
  }
  Box box;
  box.low = {-best[1], -best[3]};
  box.high = {best[0], best[2]};
  return box;
}

std::vector<double> nurbsBreaks(const Nurbs& nurbs) {
  const auto p = static_cast<std::size_t>(nurbs.degree);
  const double first = nurbs.knots[p], last = nurbs.knots[nurbs.poles.size()];
  std::vector<double> breaks;
  for (double knot : nurbs.knots) {
    if (knot > first && knot < last && (breaks.empty() || knot > breaks.back())) breaks.push_back(knot);
  }
  return breaks;
}

}  // namespace kf::curve
