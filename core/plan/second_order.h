// The fastest motion under speed and acceleration limits, v^2 linear in each cell; internal to plan.
// mm, s.
#pragma once

#include <optional>
#include <vector>

#include "core/plan/plan.h"

namespace kf::plan {

// Acceleration limits as numbers; HUGE_VAL where there is none.
struct AccelerationLimits {
  double x, y, tangential;
};
AccelerationLimits accelerationLimits(const limits::Limits& limits);

struct SecondOrder {
  std::vector<double> q;         // planned v^2
  std::vector<double> envelope;  // no feasible v^2 exceeds it at any node: its time is a lower bound
};

// `capQ` one a node, already 0 at rest and at stops.
//
// Method    reachability passes (Pham & Pham, IEEE T-RO 2018), with every row held at both ends of each cell.
// Backward:
//           the largest v^2 from which the rest can be driven. Forward: the largest reachable one. Both sets
//           are intervals from 0 because standing still is always allowed.
// Accuracy  feasible to rounding on the nodes. The forward choice is optimal except beside zeros of x' or y',
// where a
//           faster node can shorten the reach of the next; envelope drops just that coupling, so the gap
//           shows the loss.
// Cost      O(nodes), two passes.
SecondOrder solveSecondOrder(const path::Path& path, const std::vector<double>& capQ,
                             const AccelerationLimits& limits);

// Which acceleration row is the most used in the cell i, and how much of it (1: all).
struct Binding {
  LimitName name = LimitName::tangentialAcceleration;
  double use = 0.0;
};
Binding tightestRow(const path::Path& path, const AccelerationLimits& limits, std::size_t cell, double q0,
                    double q1);

}  // namespace kf::plan
