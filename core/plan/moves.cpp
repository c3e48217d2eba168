// Time that a job spends beside its contours: rapid moves, plunging, piercing.
// mm, s.
#include "core/plan/moves.h"

#include <algorithm>
#include <cmath>

namespace kf::plan {
namespace {

// The largest value along a direction that per-axis values allow.
double alongDirection(std::optional<double> x, std::optional<double> y, double tx, double ty) {
  double most = HUGE_VAL;
  if (x && tx > 0.0) most = std::min(most, *x / tx);
  if (y && ty > 0.0) most = std::min(most, *y / ty);
  return most;
}

}  // namespace

double trapezoidTime(double h, double v, double a) {
  if (!(h > 0.0)) return 0.0;
  if (!std::isfinite(a)) return h / v;
  return v * v <= h * a ? h / v + v / a : 2.0 * std::sqrt(h / a);
}

double rapidTime(double dx, double dy, const limits::Limits& limits) {
  const double h = std::hypot(dx, dy);
  if (!(h > 0.0)) return 0.0;
  const double tx = std::abs(dx) / h, ty = std::abs(dy) / h;
  double v = alongDirection(limits.x.speed, limits.y.speed, tx, ty);
  double a = alongDirection(limits.x.acceleration, limits.y.acceleration, tx, ty);
  if (limits.rapidSpeed) v = std::min(v, *limits.rapidSpeed);
  if (limits.rapidAcceleration) a = std::min(a, *limits.rapidAcceleration);
  return trapezoidTime(h, v, a);
}

double entryTime(const limits::Limits& limits) {
  double time = limits.pierceTime.value_or(0.0);
  if (limits.plungeDepth && limits.plungeFeed) {
    time += *limits.plungeDepth / *limits.plungeFeed;
    time += *limits.plungeDepth / limits.retractSpeed.value_or(*limits.plungeFeed);
  }
  return time;
}

}  // namespace kf::plan
