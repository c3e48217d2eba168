// Least-squares splines through points, joined smoothly to what is beside them.
// Lengths in mm.
#include "core/construct/fit_spline.h"

#include <algorithm>
#include <array>
#include <cmath>

namespace kf::construct {
namespace {

using curve::Vec2;

constexpr std::size_t kDegree = 5;
constexpr std::size_t kBand = kDegree + 1;
constexpr int kRounds = 18;

using Basis = std::array<double, kBand>;

// Values of the kBand basis functions that live on span k. Source: Cox and de Boor.
Basis basisAt(const std::vector<double>& knots, std::size_t k, double u) {
  Basis n{};
  std::array<double, kBand> left{}, right{};
  n[0] = 1.0;
  for (std::size_t j = 1; j <= kDegree; ++j) {
    left[j] = u - knots[k + 1 - j];
    right[j] = knots[k + j] - u;
    double saved = 0.0;
    for (std::size_t r = 0; r < j; ++r) {
      const double part = n[r] / (right[r + 1] + left[j - r]);
      n[r] = saved + right[r + 1] * part;
      saved = left[j - r] * part;
    }
    n[j] = saved;
  }
  return n;
}

// Symmetric positive banded system, by Cholesky factors in place. row[i][d] couples i and i - d.
class Banded {
 public:
  explicit Banded(std::size_t n) : rows_(n), right_(n) {}

  void add(std::size_t i, std::size_t j, double value) {
    rows_[std::max(i, j)][i > j ? i - j : j - i] += value;
  }
  void addRight(std::size_t i, Vec2 value) { right_[i] += value; }

  // A pole that is given: its row becomes the identity and its column moves to the right side.
  void fix(std::size_t i, Vec2 value) {
    for (std::size_t d = 1; d < kBand; ++d) {
      if (i >= d) {
        right_[i - d] -= rows_[i][d] * value;
        rows_[i][d] = 0.0;
      }
      if (i + d < rows_.size()) {
        right_[i + d] -= rows_[i + d][d] * value;
        rows_[i + d][d] = 0.0;
      }
    }
    rows_[i][0] = 1.0;
    right_[i] = value;
  }

  std::vector<Vec2> solve() {
    const std::size_t n = rows_.size();
    for (std::size_t i = 0; i < n; ++i) {
      for (std::size_t d = std::min(i, kBand - 1);; --d) {
        double value = rows_[i][d];
        const std::size_t j = i - d;
        for (std::size_t m = d + 1; m < kBand && m <= i; ++m) value -= rows_[i][m] * rows_[j][m - d];
        if (d == 0) {
          rows_[i][0] = std::sqrt(std::max(value, 1e-300));
          break;
        }
        rows_[i][d] = value / rows_[j][0];
      }
    }
    for (std::size_t i = 0; i < n; ++i) {
      for (std::size_t d = 1; d < kBand && d <= i; ++d) right_[i] -= rows_[i][d] * right_[i - d];
      right_[i] = right_[i] / rows_[i][0];
    }
    for (std::size_t i = n; i-- > 0;) {
      for (std::size_t d = 1; d < kBand && i + d < n; ++d) right_[i] -= rows_[i + d][d] * right_[i + d];
      right_[i] = right_[i] / rows_[i][0];
    }
    return std::move(right_);
  }

 private:
  std::vector<std::array<double, kBand>> rows_;
  std::vector<Vec2> right_;
};

class Fitter {
 public:
  Fitter(const std::vector<Vec2>& points, const std::vector<double>& heights, const EndCondition& start,
         const EndCondition& end, double tolerance)
      : points_(points), heights_(heights), start_(start), end_(end), tolerance_(tolerance) {
    chords_.push_back(0.0);
    for (std::size_t i = 1; i < points.size(); ++i)
      chords_.push_back(chords_.back() + curve::distance(points[i - 1], points[i]));
  }

  std::optional<FittedSpline> run() {
    std::vector<double> breaks{0.0, chords_.back()};
    std::optional<FittedSpline> best;
    for (int round = 0; round < kRounds; ++round) {
      const FittedSpline made = fit(breaks);
      const bool good = made.deviation <= tolerance_;
      if (best && (!good || made.residual > 0.25 * best->residual)) break;
      if (good) best = made;
      if (best && best->residual <= 0.05 * tolerance_) break;
      const std::vector<double> finer = split(breaks, good);
      if (finer.size() == breaks.size()) break;
      breaks = finer;
    }
    return best;
  }

 private:
  FittedSpline fit(const std::vector<double>& breaks) {
    knots_.assign(kDegree, breaks.front());
    knots_.insert(knots_.end(), breaks.begin(), breaks.end());
    knots_.insert(knots_.end(), kDegree, breaks.back());
    // Feet on a spline that is still far off would spoil the parameters for good: each fit begins from
    // chords.
    u_ = chords_;
    curve::Nurbs spline = solve();
    if (project(spline) <= 3.0 * tolerance_) {
      spline = solve();
      project(spline);
    }
    FittedSpline made;
    measure(spline, made);
    made.spline = std::move(spline);
    return made;
  }

  // Calls visit(point, span) with the knot span of each point's parameter.
  template <class Visit>
  void eachPoint(const Visit& visit) const {
    std::size_t k = kDegree;
    const std::size_t last = knots_.size() - kDegree - 2;
    for (std::size_t i = 0; i < points_.size(); ++i) {
      while (k < last && knots_[k + 1] <= u_[i]) ++k;
      visit(i, k);
    }
  }

  curve::Nurbs solve() const {
    const std::size_t count = knots_.size() - kBand;
    Banded system(count);
    eachPoint([&](std::size_t i, std::size_t k) {
      const Basis n = basisAt(knots_, k, u_[i]);
      for (std::size_t a = 0; a < kBand; ++a) {
        const std::size_t row = k - kDegree + a;
        system.addRight(row, n[a] * points_[i]);
        for (std::size_t b = 0; b <= a; ++b) system.add(row, k - kDegree + b, n[a] * n[b]);
      }
    });
    // A whiff of stiffness (third differences of the poles) where points are few.
    constexpr std::array<double, 4> kThird = {-1.0, 3.0, -3.0, 1.0};
    const double stiff = 1e-7 * static_cast<double>(points_.size()) / static_cast<double>(count);
    for (std::size_t i = 0; i + 4 <= count; ++i) {
      for (std::size_t a = 0; a < 4; ++a) {
        for (std::size_t b = 0; b <= a; ++b) system.add(i + a, i + b, stiff * kThird[a] * kThird[b]);
      }
    }
    fixEnds(system, count);
    curve::Nurbs spline;
    spline.degree = static_cast<int>(kDegree);
    spline.knots = knots_;
    spline.poles = system.solve();
    return spline;
  }

  // At unit speed C' = T and C'' = k N; with a1, a2 the distances of the first two inner knots,
  // C' = 5 (P1 - P0) / a1 and C'' = 20 / a1 ((P2 - P1) / a2 - (P1 - P0) / a1).
  void fixEnds(Banded& system, std::size_t count) const {
    const std::size_t m = knots_.size();
    const auto fixOne = [&system](const EndCondition& end, double direction, double a1, double a2,
                                  std::size_t i0, std::size_t i1, std::size_t i2) {
      system.fix(i0, end.p);
      if (!end.smooth) return;
      const Vec2 first = (direction * a1 / 5.0) * end.tangent;
      const Vec2 second = a2 * ((a1 / 20.0 * end.curvature) * curve::leftOf(end.tangent) + first / a1);
      system.fix(i1, end.p + first);
      system.fix(i2, end.p + first + second);
    };
    fixOne(start_, 1.0, knots_[kBand] - knots_[0], knots_[kBand + 1] - knots_[0], 0, 1, 2);
    fixOne(end_, -1.0, knots_[m - 1] - knots_[m - 1 - kBand], knots_[m - 1] - knots_[m - 2 - kBand],
           count - 1, count - 2, count - 3);
  }

  // Moves each parameter to the foot of its point, keeping them in order; returns the largest distance
  // before.
  double project(const curve::Nurbs& spline) {
    const curve::Curve c(spline);
    double before = u_.front(), farthest = 0.0;
    for (std::size_t i = 1; i + 1 < u_.size(); ++i) {
      const curve::Jet j = c.jet(u_[i]);
      const double speed = curve::dot(j.d1, j.d1);
      const double step = speed > 0.0 ? curve::dot(points_[i] - j.p, j.d1) / speed : 0.0;
      u_[i] = std::clamp(u_[i] + step, before, u_.back());
      before = u_[i];
      farthest = std::max(farthest, curve::distance(points_[i], j.p));
    }
    return farthest;
  }

  // Largest |C''| on each knot span: the poles of the second derivative hold it in their hull.
  std::vector<double> bends(const curve::Nurbs& spline) const {
    const auto& p = spline.poles;
    const auto& t = spline.knots;
    std::vector<Vec2> d1(p.size() - 1), d2(p.size() - 2);
    for (std::size_t i = 0; i + 1 < p.size(); ++i)
      d1[i] = (5.0 / (t[i + kDegree + 1] - t[i + 1])) * (p[i + 1] - p[i]);
    for (std::size_t i = 0; i + 1 < d1.size(); ++i)
      d2[i] = (4.0 / (t[i + kDegree + 1] - t[i + 2])) * (d1[i + 1] - d1[i]);
    std::vector<double> largest(p.size(), 0.0);  // index: span
    for (std::size_t k = kDegree; k < p.size(); ++k) {
      for (std::size_t i = k - kDegree; i + 2 <= k; ++i)
        largest[k] = std::max(largest[k], curve::norm(d2[i]));
    }
    return largest;
  }

  void measure(const curve::Nurbs& spline, FittedSpline& made) {
    const curve::Curve c(spline);
    const std::vector<double> bend = bends(spline);
    const std::size_t spans = knots_.size();
    excess_.assign(spans, 0.0);
    double square = 0.0, lastGap = 0.0;
    std::size_t lastSpan = kDegree;
    eachPoint([&](std::size_t i, std::size_t k) {
      const double gap = curve::distance(c.point(u_[i]), points_[i]);
      square += gap * gap;
      if (i > 0) {
        double most = 0.0;
        for (std::size_t span = lastSpan; span <= k; ++span) most = std::max(most, bend[span]);
        const double step = u_[i] - u_[i - 1];
        const double bound = std::max(gap, lastGap) + most * step * step / 8.0 + heights_[i - 1];
        made.deviation = std::max(made.deviation, bound);
        for (std::size_t span = lastSpan; span <= k; ++span) excess_[span] = std::max(excess_[span], bound);
      }
      lastGap = gap;
      lastSpan = k;
    });
    made.residual = std::sqrt(square / static_cast<double>(points_.size()));
  }

  // Halves the spans that are out of tolerance, or all of them, as far as each half keeps some points.
  std::vector<double> split(const std::vector<double>& breaks, bool all) const {
    std::vector<std::size_t> points(knots_.size(), 0);
    eachPoint([&](std::size_t, std::size_t k) { ++points[k]; });
    std::vector<double> finer{breaks.front()};
    for (std::size_t i = 0; i + 1 < breaks.size(); ++i) {
      const std::size_t span = i + kDegree;
      if ((all || excess_[span] > 0.9 * tolerance_) && points[span] >= 4)
        finer.push_back(0.5 * (breaks[i] + breaks[i + 1]));
      finer.push_back(breaks[i + 1]);
    }
    return finer;
  }

  const std::vector<Vec2>& points_;
  const std::vector<double>& heights_;
  const EndCondition &start_, &end_;
  double tolerance_;
  std::vector<double> chords_, u_, knots_, excess_;
};

}  // namespace

std::optional<FittedSpline> fitSpline(const std::vector<Vec2>& points, const std::vector<double>& heights,
                                      const EndCondition& start, const EndCondition& end, double tolerance) {
  if (points.size() < 2) return std::nullopt;
  return Fitter(points, heights, start, end, tolerance).run();
}

}  // namespace kf::construct
