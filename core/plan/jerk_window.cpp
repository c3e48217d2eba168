// The jerk-limited problem between two stops as rows over spline coefficients.
// mm, s.
#include "core/plan/jerk_window.h"

#include <algorithm>
#include <cassert>
#include <cmath>
#include <optional>

namespace kf::plan {
namespace {

using Coefficients = std::array<double, 4>;

double limitOf(const std::optional<double>& limit) {
  return limit.value_or(HUGE_VAL);
}

// Largest jerk of a ramp of length d from rest between nodes a and b, so that no axis exceeds its own. With s
// = j t^3/6 the jerk vector is (j - v^3 k^2) T + (3 v a k + v^3 dk) N, v a = 3 j s and v^3 = 4.5 j s^2: all
// linear in j.
double rampJerk(const path::Path& path, std::size_t a, std::size_t b, double d,
                const limits::Limits& limits) {
  double jerk = limitOf(limits.tangentialJerk);
  for (std::size_t i : {a, b}) {
    const double k = std::abs(path.k[i]), along = 1.0 + 4.5 * d * d * k * k,
                 across = 9.0 * d * k + 4.5 * d * d * std::abs(path.dk[i]);
    const double tx = std::abs(path.tx[i]), ty = std::abs(path.ty[i]);
    jerk = std::min({jerk, limitOf(limits.x.jerk) / (tx * along + ty * across),
                     limitOf(limits.y.jerk) / (ty * along + tx * across)});
  }
  return jerk;
}

// Builds the rows of one window.
class Builder {
 public:
  Builder(const path::Path& path, std::size_t first, std::size_t last, const std::vector<double>& capQ,
          const limits::Limits& limits)
      : path_(path), capQ_(capQ), limits_(limits) {
    // Each place once, with the path's node before and after it.
    for (std::size_t i = first; i <= last; ++i) {
      if (i > first && i < last && path.breakAfter[i] != path::BreakKind::none) {
        left_.push_back(i);
        while (path.breakAfter[i] != path::BreakKind::none) ++i;
        right_.push_back(i);
      } else {
        left_.push_back(i);
        right_.push_back(i);
      }
    }
  }

  JerkWindow build() {
    const std::size_t inner = left_.size() - 2;  // nodes of the spline
    assert(inner >= 2);
    for (std::size_t j = 0; j < inner; ++j) window_.s.push_back(path_.s[left_[j + 1]]);
    window_.startRamp = window_.s.front() - path_.s[right_.front()];
    window_.endRamp = path_.s[left_.back()] - window_.s.back();
    const std::size_t n = inner - 1;
    h_.resize(n + 4);  // with two ghosts at each end; h(i) = h_[i + 2]
    for (std::size_t j = 0; j < n; ++j) h_[j + 2] = window_.s[j + 1] - window_.s[j];
    h_[0] = h_[1] = h_[2];
    h_[n + 2] = h_[n + 3] = h_[n + 1];
    window_.startGhost = ghost(h_[2], window_.startRamp);
    window_.endGhost = ghost(h_[n + 1], window_.endRamp);
    window_.nodes.resize(inner);
    window_.cells.resize(n);
    for (std::size_t j = 0; j < inner; ++j) addNode(j, n);
    capNearRest(true);
    capNearRest(false);
    for (std::size_t j = 0; j < n; ++j) addCell(j);
    window_.nodes.front().weight +=
        3.0 * window_.startRamp;  // a ramp of length d up to speed v takes 3 d / v
    window_.nodes.back().weight += 3.0 * window_.endRamp;
    return std::move(window_);
  }

 private:
  // q' = r q at the node, r = 4 / (3 d), with equal h on both sides: (b1 - b0) / h = r (b0 + b1) / 2.
  static double ghost(double h, double d) {
    const double half = 2.0 / (3.0 * d);
    return (1.0 / h - half) / (1.0 / h + half);
  }

  double h(std::ptrdiff_t i) const { return h_[static_cast<std::size_t>(i + 2)]; }

  // Coefficients of q' at node i + offset, on the window of node i.
  Coefficients slope(std::ptrdiff_t i, std::ptrdiff_t offset) const {
    Coefficients c{};
    const double sum = h(i + offset - 1) + h(i + offset);
    c[static_cast<std::size_t>(offset + 1)] = -2.0 / sum;
    c[static_cast<std::size_t>(offset + 2)] = 2.0 / sum;
    return c;
  }

  Coefficients value(std::ptrdiff_t i) const {
    const double sum = h(i - 1) + h(i);
    return {0.0, h(i) / sum, h(i - 1) / sum, 0.0};
  }

  void addNode(std::size_t j, std::size_t n) {
    const auto i = static_cast<std::ptrdiff_t>(j);
    JerkNode& node = window_.nodes[j];
    const Coefficients q = value(i), p = slope(i, 0);
    node.q = {q[1], q[2]};
    const std::size_t a = left_[j + 1], b = right_[j + 1];
    node.cap = std::min(capQ_[a], capQ_[b]);
    if (j == 0) node.cap = std::min(node.cap, rampCap(right_.front(), a, window_.startRamp));
    if (j == n) node.cap = std::min(node.cap, rampCap(b, left_.back(), window_.endRamp));
    node.firstRow = window_.rows.size();
    boundSlope(a, node.cap);
    boundSlope(b, node.cap);
    addAcceleration(a, q, p);
    if (b != a) addAcceleration(b, q, p);
    if (j > 0) addJerk(a, q, p, second(p, slope(i, -1), h(i - 1)));
    if (j < n) addJerk(b, q, p, second(slope(i, 1), p, h(i)));
    node.rows = window_.rows.size() - node.firstRow;
  }

  // |x' q'/2| <= A + |x''| q on the axis that moves the more.
  void boundSlope(std::size_t m, double cap) {
    const bool x = std::abs(path_.tx[m]) > std::abs(path_.ty[m]);
    const double most = limitOf(x ? limits_.x.acceleration : limits_.y.acceleration);
    const double axis =
        2.0 * (most + std::abs(path_.k[m]) * cap) / std::max(std::abs(path_.tx[m]), std::abs(path_.ty[m]));
    window_.steepest =
        std::max(window_.steepest, std::min(axis, 2.0 * limitOf(limits_.tangentialAcceleration)));
  }

  // v = j t^2/2 and d = j t^3/6 give v^2 = (9 j d^2 / 2)^(2/3).
  double rampCap(std::size_t a, std::size_t b, double d) const {
    const double jerk = rampJerk(path_, a, b, d, limits_);
    return jerk < HUGE_VAL ? std::pow(4.5 * jerk * d * d, 2.0 / 3.0) : HUGE_VAL;
  }

  // From rest, no motion is faster after a distance d than constant jerk makes it: q <= (9 j d^2 / 2)^(2/3),
  // with j the largest third derivative of s(t) that any place so far allows. Without this a discretised
  // motion could stand still in its first cells, where v = 0 switches the jerk rows off, and then jump.
  void capNearRest(bool fromStart) {
    double jerk = 0.0;
    const std::size_t count = window_.nodes.size();
    for (std::size_t step = 0; step < count; ++step) {
      const std::size_t j = fromStart ? step : count - 1 - step;
      JerkNode& node = window_.nodes[j];
      const double d = fromStart ? window_.startRamp + window_.s[j] - window_.s.front()
                                 : window_.endRamp + window_.s.back() - window_.s[j];
      for (std::size_t m : {left_[j + 1], right_[j + 1]})
        jerk = std::max(jerk, jerkAfter(m, d, jerk, node.cap));
      const double envelope = std::pow(4.5 * jerk * d * d, 2.0 / 3.0);
      if (envelope > node.cap && step > 0) break;  // from here on the caps are the stricter
      node.cap = std::min(node.cap, envelope);
    }
  }

  // A bound on the third derivative s3 of s(t) at a place d from rest. The tangent's part of the jerk, s3 -
  // v^3 k^2, is at most |t_x| J_x + |t_y| J_y. One axis alone gives |t_a s3 + n_a (3 v a k + v^3 dk) - t_a
  // v^3 k^2| <= J_a, and while s3 has been at most e, v a <= 3 e d and v^3 <= 4.5 e d^2: so s3 <= J_a / |t_a|
  // + c e, and e = J_a / (|t_a| (1 - c)) holds.
  double jerkAfter(std::size_t m, double d, double before, double cap) const {
    const double k = std::abs(path_.k[m]), dk = std::abs(path_.dk[m]), tx = std::abs(path_.tx[m]),
                 ty = std::abs(path_.ty[m]);
    const double jx = limitOf(limits_.x.jerk), jy = limitOf(limits_.y.jerk);
    double most = (tx > 0.0 ? tx * jx : 0.0) + (ty > 0.0 ? ty * jy : 0.0) + std::pow(cap, 1.5) * k * k;
    for (const auto& [along, across, limit] : {std::array{tx, ty, jx}, std::array{ty, tx, jy}}) {
      if (!(along > 0.0) || !(limit < HUGE_VAL)) continue;
      const double c = across / along * (9.0 * d * k + 4.5 * d * d * dk) + 4.5 * d * d * k * k;
      if (c < 1.0) most = std::min(most, std::max(limit / (along * (1.0 - c)), limit / along + c * before));
    }
    return std::min(most, limitOf(limits_.tangentialJerk));
  }

  static Coefficients second(const Coefficients& to, const Coefficients& from, double width) {
    Coefficients c{};
    for (std::size_t k = 0; k < 4; ++k) c[k] = (to[k] - from[k]) / width;
    return c;
  }

  void add(const Coefficients& q, double fq, const Coefficients& p, double fp, const Coefficients& c,
           double fc, double limit, LimitName name, bool jerk) {
    if (!(limit < HUGE_VAL)) return;
    TwoSided row;
    for (std::size_t k = 0; k < 4; ++k) row.a[k] = fq * q[k] + fp * p[k] + fc * c[k];
    row.limit = limit;
    row.name = name;
    row.jerk = jerk;
    window_.rows.push_back(row);
  }

  // x'' q + x' q'/2, and q'/2.
  void addAcceleration(std::size_t m, const Coefficients& q, const Coefficients& p) {
    const double k = path_.k[m], tx = path_.tx[m], ty = path_.ty[m];
    add(q, -k * ty, p, 0.5 * tx, {}, 0.0, limitOf(limits_.x.acceleration), LimitName::axisAccelerationX,
        false);
    add(q, k * tx, p, 0.5 * ty, {}, 0.0, limitOf(limits_.y.acceleration), LimitName::axisAccelerationY,
        false);
    add(q, 0.0, p, 0.5, {}, 0.0, limitOf(limits_.tangentialAcceleration), LimitName::tangentialAcceleration,
        false);
  }

  // x''' q + 3/2 x'' q' + x' q''/2 with x''' = dk N - k^2 T, and q''/2; each times v.
  void addJerk(std::size_t m, const Coefficients& q, const Coefficients& p, const Coefficients& c) {
    const double k = path_.k[m], dk = path_.dk[m], tx = path_.tx[m], ty = path_.ty[m];
    add(q, -dk * ty - k * k * tx, p, -1.5 * k * ty, c, 0.5 * tx, limitOf(limits_.x.jerk),
        LimitName::axisJerkX, true);
    add(q, dk * tx - k * k * ty, p, 1.5 * k * tx, c, 0.5 * ty, limitOf(limits_.y.jerk), LimitName::axisJerkY,
        true);
    add(q, 0.0, p, 0.0, c, 0.5, limitOf(limits_.tangentialJerk), LimitName::tangentialJerk, true);
  }

  // Simpson's rule: q at the middle is the mean of the ends less h^2 q'' / 8.
  void addCell(std::size_t j) {
    const auto i = static_cast<std::ptrdiff_t>(j);
    const double width = h(i);
    JerkCell& cell = window_.cells[j];
    const double before = h(i - 1) + width, after = width + h(i + 1);
    const double low = width / before, high = width / after;  // weights of the neighbours' coefficients
    // q_i = (h b_(i-1) + h_(i-1) b_i)/(h_(i-1)+h), q_(i+1) = (h_(i+1) b_i + h b_(i+1))/(h+h_(i+1)), q'' from
    // the slopes.
    cell.middle[0] = 0.5 * low - 0.125 * width * (2.0 / before);
    cell.middle[2] = 0.5 * high - 0.125 * width * (2.0 / after);
    cell.middle[1] = 1.0 - cell.middle[0] - cell.middle[2];
    cell.weight = 4.0 * width / 6.0;
    window_.nodes[j].weight += width / 6.0;
    window_.nodes[j + 1].weight += width / 6.0;
  }

  const path::Path& path_;
  const std::vector<double>& capQ_;
  const limits::Limits& limits_;
  std::vector<std::size_t> left_, right_;
  std::vector<double> h_;
  JerkWindow window_;
};

}  // namespace

JerkWindow makeJerkWindow(const path::Path& path, std::size_t first, std::size_t last,
                          const std::vector<double>& capQ, const limits::Limits& limits) {
  return Builder(path, first, last, capQ, limits).build();
}

}  // namespace kf::plan
