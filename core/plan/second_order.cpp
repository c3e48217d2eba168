// The fastest motion under speed and acceleration limits.
// mm, s.
#include "core/plan/second_order.h"

#include <algorithm>
#include <array>
#include <cmath>

namespace kf::plan {
namespace {

// Axis acceleration is x'' q + x' q'/2. With q' = (q1 - q0)/h, at the cell's start:
//   | (x0'' - x0'/2h) q0 + x0'/2h q1 | <= A,   at its end:  | -x1'/2h q0 + (x1'' + x1'/2h) q1 | <= A.
// Each side of each row is alpha q0 + beta q1 <= A. Rows with beta > 0 bound q1 from above (q1 <= level -
// slope q0), with beta < 0 from below, and with beta = 0 they bound q0 alone.
struct Bound {
  double level, slope;
};

// Geometry half-way through a cell, from the values and slopes at its ends (cubic Hermite, error O(h^4)).
// Where the curvature is even over the cell its ends already bound the middle.
struct Middle {
  double tx = 1.0, ty = 0.0, k = 0.0;
  bool bends = false;
};

Middle middleOf(const path::Path& path, std::size_t i) {
  constexpr double kEven = 1e-3;  // relative change of the curvature over a cell
  const double h = path.s[i + 1] - path.s[i], k0 = path.k[i], k1 = path.k[i + 1];
  Middle m;
  m.k = 0.5 * (k0 + k1) + 0.125 * h * (path.dk[i] - path.dk[i + 1]);
  const double larger = std::max(std::abs(k0), std::abs(k1));
  m.bends = std::abs(m.k - k0) + std::abs(m.k - k1) > kEven * larger;
  if (!m.bends) return m;
  m.tx = 0.5 * (path.tx[i] + path.tx[i + 1]) + 0.125 * h * (-k0 * path.ty[i] + k1 * path.ty[i + 1]);
  m.ty = 0.5 * (path.ty[i] + path.ty[i + 1]) + 0.125 * h * (k0 * path.tx[i] - k1 * path.tx[i + 1]);
  const double n = std::hypot(m.tx, m.ty);
  m.tx /= n;
  m.ty /= n;
  return m;
}

class Cell {
 public:
  Cell(const path::Path& path, const AccelerationLimits& limits, std::size_t i) {
    const double half = 0.5 / (path.s[i + 1] - path.s[i]);
    const Middle middle = middleOf(path, i);
    if (middle.bends) {
      // In the middle q is the mean of both ends: the row is (x''/2 - x'/2h) q0 + (x''/2 + x'/2h) q1.
      addMiddle(middle.tx * half, -0.5 * middle.k * middle.ty, limits.x);
      addMiddle(middle.ty * half, 0.5 * middle.k * middle.tx, limits.y);
    }
    addAxis(path.tx[i] * half, path.tx[i + 1] * half, -path.k[i] * path.ty[i],
            -path.k[i + 1] * path.ty[i + 1], limits.x);
    addAxis(path.ty[i] * half, path.ty[i + 1] * half, path.k[i] * path.tx[i], path.k[i + 1] * path.tx[i + 1],
            limits.y);
    if (limits.tangential < HUGE_VAL) addRow(-half, half, limits.tangential);
  }

  // The largest q0 <= high0 for which some q1 in [0, high1] keeps every row.
  double largestStart(double high0, double high1) const {
    double q0 = std::min(high0, startAlone_);
    const double top = std::min(high1, endAlone_);
    const auto tighten = [&q0](Bound upper, Bound lower) {
      // lower.level - lower.slope q0 <= upper.level - upper.slope q0
      const double room = upper.level - lower.level, rate = upper.slope - lower.slope;
      if (rate * q0 > room && rate > 0.0) q0 = std::max(0.0, room / rate);
    };
    for (std::size_t a = 0; a < above_; ++a) {
      for (std::size_t b = 0; b < below_; ++b) tighten(upper_[a], lower_[b]);
      tighten(upper_[a], {0.0, 0.0});
    }
    for (std::size_t b = 0; b < below_; ++b) tighten({top, 0.0}, lower_[b]);
    return q0;
  }

  // The largest q1 <= high1 for this q0.
  double largestEnd(double q0, double high1) const {
    double q1 = std::min(high1, endAlone_);
    for (std::size_t a = 0; a < above_; ++a) q1 = std::min(q1, upper_[a].level - upper_[a].slope * q0);
    return std::max(0.0, q1);
  }

  // The largest q1 <= high1 that some q0 in [0, high0] reaches.
  double largestEndFromAny(double high0, double high1) const {
    const double top0 = std::min(high0, startAlone_);
    double q1 = std::min(high1, endAlone_);
    // At a fixed q1 each row bounds q0; the rows that fall with q0 ask for a small one, those that rise for a
    // large one.
    for (int step = 0; step < 8; ++step) {
      double low = 0.0, high = top0, worst = q1;
      std::size_t lowRow = above_ + below_, highRow = lowRow;
      for (std::size_t r = 0; r < above_ + below_; ++r) {
        const bool up = r < above_;
        const Bound bound = up ? upper_[r] : lower_[r - above_];
        // up: slope q0 <= level - q1;  below: slope q0 >= level - q1
        const double rest = bound.level - q1;
        if (bound.slope == 0.0) {
          if (up) worst = std::min(worst, bound.level);
          continue;
        }
        const double at = rest / bound.slope;
        if ((bound.slope > 0.0) == up) {
          if (at < high) {
            high = at;
            highRow = r;
          }
        } else if (at > low) {
          low = at;
          lowRow = r;
        }
      }
      if (worst < q1) {
        q1 = worst;
        continue;
      }
      if (low <= high * (1.0 + 1e-14)) return std::max(0.0, q1);
      q1 = std::min(q1, crossing(lowRow, highRow, top0));
    }
    return std::max(0.0, q1);
  }

 private:
  void addAxis(double t0, double t1, double n0, double n1, double limit) {
    if (!(limit < HUGE_VAL)) return;
    addRow(n0 - t0, t0, limit);
    addRow(-t1, n1 + t1, limit);
  }

  void addMiddle(double t, double n, double limit) {
    if (limit < HUGE_VAL) addRow(n - t, n + t, limit);
  }

  void addRow(double alpha, double beta, double limit) {
    // A coefficient that is rounding against the other counts as none: the row then bounds one end alone.
    if (std::abs(beta) <= 1e-13 * std::abs(alpha)) {
      if (alpha != 0.0) startAlone_ = std::min(startAlone_, limit / std::abs(alpha));
      return;
    }
    if (std::abs(alpha) <= 1e-13 * std::abs(beta)) {
      endAlone_ = std::min(endAlone_, limit / std::abs(beta));
      return;
    }
    const double level = limit / std::abs(beta), slope = alpha / beta;
    upper_[above_++] = {level, slope};
    lower_[below_++] = {-level, slope};
  }

  // q1 where the bound that asks for a large q0 and the one that asks for a small q0 meet.
  double crossing(std::size_t lowRow, std::size_t highRow, double top0) const {
    const std::size_t none = above_ + below_;
    const auto row = [this](std::size_t r) { return r < above_ ? upper_[r] : lower_[r - above_]; };
    if (lowRow == none) return highRow == none ? HUGE_VAL : row(highRow).level;  // the smallest q0 is 0
    const Bound low = row(lowRow);
    if (highRow == none) return low.level - low.slope * top0;
    const Bound high = row(highRow);
    const double q0 = (high.level - low.level) / (high.slope - low.slope);
    return low.level - low.slope * q0;
  }

  std::array<Bound, 8> upper_{}, lower_{};
  std::size_t above_ = 0, below_ = 0;
  double startAlone_ = HUGE_VAL, endAlone_ = HUGE_VAL;
};

}  // namespace

AccelerationLimits accelerationLimits(const limits::Limits& limits) {
  return {limits.x.acceleration.value_or(HUGE_VAL), limits.y.acceleration.value_or(HUGE_VAL),
          limits.tangentialAcceleration.value_or(HUGE_VAL)};
}

SecondOrder solveSecondOrder(const path::Path& path, const std::vector<double>& capQ,
                             const AccelerationLimits& limits) {
  const std::size_t n = path.size();
  SecondOrder r;
  r.envelope = capQ;
  std::vector<double>& high = r.envelope;
  for (std::size_t i = n - 1; i-- > 0;) {
    if (path.breakAfter[i] != path::BreakKind::none) {
      high[i] = std::min(high[i], high[i + 1]);
    } else {
      high[i] = Cell(path, limits, i).largestStart(high[i], high[i + 1]);
    }
  }
  r.q = high;
  for (std::size_t i = 0; i + 1 < n; ++i) {
    if (path.breakAfter[i] != path::BreakKind::none) {
      r.q[i + 1] = std::min(r.q[i], high[i + 1]);
      high[i + 1] = std::min(high[i], high[i + 1]);
      continue;
    }
    const Cell cell(path, limits, i);
    r.q[i + 1] = cell.largestEnd(r.q[i], high[i + 1]);
    high[i + 1] = cell.largestEndFromAny(high[i], high[i + 1]);
  }
  return r;
}

Binding tightestRow(const path::Path& path, const AccelerationLimits& limits, std::size_t i, double q0,
                    double q1) {
  Binding binding;
  const double half = 0.5 * (q1 - q0) / (path.s[i + 1] - path.s[i]);
  const auto offer = [&binding](double value, double limit, LimitName name) {
    const double use = std::abs(value) / limit;
    if (use > binding.use) binding = {name, use};
  };
  offer(half, limits.tangential, LimitName::tangentialAcceleration);
  for (std::size_t e : {i, i + 1}) {
    const double q = e == i ? q0 : q1;
    offer(-path.k[e] * path.ty[e] * q + path.tx[e] * half, limits.x, LimitName::axisAccelerationX);
    offer(path.k[e] * path.tx[e] * q + path.ty[e] * half, limits.y, LimitName::axisAccelerationY);
  }
  return binding;
}

}  // namespace kf::plan
