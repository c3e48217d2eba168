// The time law along arc length: cells, their elementary motion, and evaluation.
// mm, s.
#include "core/schedule/schedule.h"

#include <algorithm>
#include <cassert>
#include <cmath>

namespace kf::schedule {
namespace {

// Inside a quadratic cell  v^2 = q + c1 u + c2 u^2,  so  u'' = c1/2 + c2 u: a linear equation with constant
// coefficients.
//   c2 = 0: u = v0 t + c1 t^2 / 4
//   c2 > 0: u = v0 sinh(w t)/w + (c1/2)(cosh(w t) - 1)/w^2,  w^2 = c2
//   c2 < 0: the same with sin and cos, w^2 = -c2
// S(t) = sinh(w t)/w (or t, or sin) and C(t) = (cosh(w t) - 1)/w^2 (or t^2/2, or (1 - cos)/w^2) keep all
// three alike:
//   u = v0 S + (c1/2) C,  v = v0 (1 + c2 C) + (c1/2) S,  a = c1/2 + c2 u,  j = c2 v.
struct Pair {
  double s, c;
};

Pair elementary(double c2, double t) {
  const double x = c2 * t * t;
  if (std::abs(x) < 1e-3) {  // series; the next terms are below 1e-17
    return {t * (1.0 + x / 6.0 * (1.0 + x / 20.0 * (1.0 + x / 42.0 * (1.0 + x / 72.0)))),
            0.5 * t * t * (1.0 + x / 12.0 * (1.0 + x / 30.0 * (1.0 + x / 56.0 * (1.0 + x / 90.0))))};
  }
  if (c2 > 0.0) {
    const double w = std::sqrt(c2), half = std::sinh(0.5 * w * t);
    return {std::sinh(w * t) / w, 2.0 * half * half / c2};
  }
  const double w = std::sqrt(-c2), half = std::sin(0.5 * w * t);
  return {std::sin(w * t) / w, -2.0 * half * half / c2};
}

// Time to cross a quadratic cell of length h. With z = (v1 - v0) and A0, A1 the accelerations at the ends:
// for c2 = 0 it is 2 h / (v0 + v1); in general integrate du / sqrt(q + c1 u + c2 u^2).
// c2 > 0: (1/w) log((A1/w + v1) / (A0/w + v0)); c2 < 0: the angle of (v, a) turned through, over w.
double crossingTime(double v0, double v1, double c1, double c2, double h) {
  const double plain = 2.0 * h / (v0 + v1);
  const double x = c2 * plain * plain;
  const double a0 = 0.5 * c1, a1 = a0 + c2 * h;
  double t = plain;
  if (std::abs(x) >= 1e-4) {
    const double w = std::sqrt(std::abs(c2));
    if (c2 > 0.0) {
      // The smaller of the two sums is found from a^2/c2 - v^2 = constant, without cancellation.
      const double up = a1 / w + v1, down = a0 / w + v0;
      t = (a0 + a1 >= 0.0) ? std::log(up / down) / w : std::log((v0 - a0 / w) / (v1 - a1 / w)) / w;
    } else {
      const double turned = std::atan2(-(v0 * a1 - v1 * a0) / w, v0 * v1 + a0 * a1 / -c2);
      t = turned / w;
    }
    if (!(t > 0.0) || !std::isfinite(t)) t = plain;
  }
  // Two Newton steps on u(t) = h settle the last digits.
  for (int step = 0; step < 3; ++step) {
    const Pair e = elementary(c2, t);
    const double u = v0 * e.s + a0 * e.c, v = v0 * (1.0 + c2 * e.c) + a0 * e.s;
    if (!(v > 0.0)) break;
    const double next = t - (u - h) / v;
    if (!(next > 0.5 * t && next < 2.0 * t)) break;
    t = next;
  }
  return t;
}

}  // namespace

Schedule Schedule::constantAcceleration(std::vector<double> s, std::vector<double> q,
                                        std::vector<LimitName> limitedBy) {
  assert(s.size() >= 2 && q.size() == s.size() && limitedBy.size() == s.size());
  Schedule r;
  const std::size_t cells = s.size() - 1;
  r.t_.assign(s.size(), 0.0);
  r.c1_.resize(cells);
  r.c2_.assign(cells, 0.0);
  r.kind_.assign(cells, CellKind::quadratic);
  double t = 0.0, compensation = 0.0;
  double v = std::sqrt(q[0]);
  for (std::size_t i = 0; i < cells; ++i) {
    const double h = s[i + 1] - s[i], next = std::sqrt(q[i + 1]);
    assert(h > 0.0 && v + next > 0.0);
    r.c1_[i] = (q[i + 1] - q[i]) / h;
    const double part = 2.0 * h / (v + next) - compensation;  // Kahan's sum
    const double sum = t + part;
    compensation = (sum - t) - part;
    t = sum;
    r.t_[i + 1] = t;
    v = next;
  }
  r.s_ = std::move(s);
  r.q_ = std::move(q);
  r.limitedBy_ = std::move(limitedBy);
  return r;
}

Schedule Schedule::constantJerkLike(std::vector<double> s, std::vector<double> q, std::vector<double> slope,
                                    std::vector<LimitName> limitedBy) {
  assert(s.size() >= 2 && q.size() == s.size() && slope.size() + 1 == s.size());
  Schedule r;
  const std::size_t cells = s.size() - 1;
  r.t_.assign(s.size(), 0.0);
  r.c1_ = std::move(slope);
  r.c2_.resize(cells);
  r.kind_.assign(cells, CellKind::quadratic);
  double t = 0.0, compensation = 0.0;
  for (std::size_t i = 0; i < cells; ++i) {
    const double h = s[i + 1] - s[i], v0 = std::sqrt(q[i]), v1 = std::sqrt(q[i + 1]);
    assert(h > 0.0 && v0 + v1 > 0.0);
    double crossing = 0.0;
    if (v0 == 0.0 || v1 == 0.0) {
      // u = J t^3 / 6 and v = J t^2 / 2 at the far end: t = 3 h / v.
      r.kind_[i] = v0 == 0.0 ? CellKind::jerkFromRest : CellKind::jerkToRest;
      crossing = 3.0 * h / (v0 + v1);
      r.c1_[i] = 6.0 * h / (crossing * crossing * crossing);  // the jerk
    } else {
      r.c2_[i] = ((q[i + 1] - q[i]) / h - r.c1_[i]) / h;
      crossing = crossingTime(v0, v1, r.c1_[i], r.c2_[i], h);
    }
    const double part = crossing - compensation;
    const double sum = t + part;
    compensation = (sum - t) - part;
    t = sum;
    r.t_[i + 1] = t;
  }
  r.s_ = std::move(s);
  r.q_ = std::move(q);
  r.limitedBy_ = std::move(limitedBy);
  return r;
}

State Schedule::inCell(std::size_t i, double tau) const {
  State state;
  state.t = t_[i] + tau;
  state.limitedBy = limitedBy_[i];
  const double h = s_[i + 1] - s_[i], width = t_[i + 1] - t_[i];
  if (kind_[i] == CellKind::quadratic) {
    const double v0 = std::sqrt(q_[i]), a0 = 0.5 * c1_[i], c2 = c2_[i];
    const Pair e = elementary(c2, tau);
    const double u = v0 * e.s + a0 * e.c;
    state.s = s_[i] + std::clamp(u, 0.0, h);
    state.v = std::max(0.0, v0 * (1.0 + c2 * e.c) + a0 * e.s);
    state.a = a0 + c2 * u;
    state.j = c2 * state.v;
    return state;
  }
  const double jerk = c1_[i];
  const bool from = kind_[i] == CellKind::jerkFromRest;
  const double x = from ? tau : width - tau;
  const double u = jerk * x * x * x / 6.0;
  state.s = from ? s_[i] + std::min(u, h) : s_[i + 1] - std::min(u, h);
  state.v = 0.5 * jerk * x * x;
  state.a = from ? jerk * x : -jerk * x;
  state.j = jerk;
  return state;
}

State Schedule::atTime(double t) const {
  const auto above = std::upper_bound(t_.begin(), t_.end(), t);
  std::size_t hint = above == t_.begin() ? 0 : static_cast<std::size_t>(above - t_.begin()) - 1;
  return atTime(t, hint);
}

State Schedule::atTime(double t, std::size_t& hint) const {
  assert(size() >= 2);
  t = std::clamp(t, 0.0, time());
  std::size_t i = std::min(hint, size() - 2);
  while (i > 0 && t_[i] > t) --i;
  while (i + 2 < size() && t_[i + 1] <= t) ++i;
  hint = i;
  State state = inCell(i, t - t_[i]);
  if (i + 2 == size() && t >= t_[i + 1]) {
    state.s = s_.back();
    state.v = std::sqrt(q_.back());
    state.limitedBy = limitedBy_.back();
  }
  return state;
}

State Schedule::atLength(double s) const {
  const auto above = std::upper_bound(s_.begin(), s_.end(), s);
  std::size_t hint = above == s_.begin() ? 0 : static_cast<std::size_t>(above - s_.begin()) - 1;
  return atLength(s, hint);
}

State Schedule::atLength(double s, std::size_t& hint) const {
  assert(size() >= 2);
  s = std::clamp(s, 0.0, length());
  std::size_t i = std::min(hint, size() - 2);
  while (i > 0 && s_[i] > s) --i;
  while (i + 2 < size() && s_[i + 1] <= s) ++i;
  hint = i;
  const double u = s - s_[i], width = t_[i + 1] - t_[i];
  double tau = 0.0;
  if (kind_[i] == CellKind::quadratic) {
    const double v = std::sqrt(std::max(0.0, q_[i] + u * (c1_[i] + u * c2_[i])));
    if (u >= s_[i + 1] - s_[i]) {
      tau = width;
    } else if (u > 0.0) {
      tau = std::min(width, crossingTime(std::sqrt(q_[i]), v, c1_[i], c2_[i], u));
    }
  } else if (kind_[i] == CellKind::jerkFromRest) {
    tau = std::cbrt(6.0 * u / c1_[i]);
  } else {
    tau = width - std::cbrt(6.0 * (s_[i + 1] - s) / c1_[i]);
  }
  State state = inCell(i, std::clamp(tau, 0.0, width));
  state.s = s;
  if (i + 2 == size() && s >= s_[i + 1]) {
    state.v = std::sqrt(q_.back());
    state.limitedBy = limitedBy_.back();
  }
  return state;
}

std::vector<double> Schedule::timeByLimit() const {
  std::vector<double> sums(kLimitNameCount, 0.0);
  for (std::size_t i = 0; i + 1 < size(); ++i)
    sums[static_cast<std::size_t>(limitedBy_[i])] += t_[i + 1] - t_[i];
  return sums;
}

}  // namespace kf::schedule
