// The answer of a plan as a value: speed along arc length, and its evaluation at any s or any t.
// mm, s.
#pragma once

#include <cstddef>
#include <vector>

#include "core/base/limit_name.h"

namespace kf::schedule {

// How the motion runs inside one cell [s_i, s_i+1].
enum class CellKind : unsigned char {
  quadratic,  // v^2 = q + c1 u + c2 u^2, u = s - s_i; the time law is then elementary (linear, trigonometric,
              // hyperbolic)
  jerkFromRest,  // u = J t^3 / 6, from rest
  jerkToRest,    // the mirror image: rest at s_i+1
};

struct State {
  double t = 0.0;
  double s = 0.0;
  double v = 0.0;  // ds/dt, mm/s
  double a = 0.0;  // d2s/dt2, mm/s^2
  double j = 0.0;  // d3s/dt3, mm/s^3
  LimitName limitedBy = LimitName::feed;
};

// Nodes with strictly rising s and t; cell i joins nodes i and i+1. Built by the planner, read by everybody.
class Schedule {
 public:
  Schedule() = default;
  // v^2 linear in each cell (constant tangential acceleration).
  // Domain  s strictly rising; q >= 0; no two neighbours both 0; sizes equal; limitedBy one a node.
  static Schedule constantAcceleration(std::vector<double> s, std::vector<double> q,
                                       std::vector<LimitName> limitedBy);
  // v^2 quadratic in each cell: q at the nodes and dq/ds at the start of each cell (size nodes - 1); cells
  // that begin or end at rest are jerk ramps through the other end's speed.
  static Schedule constantJerkLike(std::vector<double> s, std::vector<double> q, std::vector<double> slope,
                                   std::vector<LimitName> limitedBy);

  bool isEmpty() const { return s_.empty(); }
  std::size_t size() const { return s_.size(); }
  double length() const { return s_.empty() ? 0.0 : s_.back(); }
  double time() const { return t_.empty() ? 0.0 : t_.back(); }

  const std::vector<double>& s() const { return s_; }
  const std::vector<double>& q() const { return q_; }  // v^2 at the nodes
  const std::vector<double>& t() const { return t_; }  // time at the nodes
  const std::vector<LimitName>& limitedBy() const { return limitedBy_; }

  // Clamped to the domain; at a node the later cell. Cost O(log nodes), or amortised O(1) with a hint.
  State atTime(double t) const;
  State atTime(double t, std::size_t& hint) const;
  State atLength(double s) const;
  State atLength(double s, std::size_t& hint) const;

  // Seconds by what binds at the start of each cell; sums to time().
  std::vector<double> timeByLimit() const;  // index: LimitName

 private:
  State inCell(std::size_t cell, double tau) const;
  std::vector<double> s_, q_, t_, c1_, c2_;
  std::vector<CellKind> kind_;
  std::vector<LimitName> limitedBy_;
};

}  // namespace kf::schedule
