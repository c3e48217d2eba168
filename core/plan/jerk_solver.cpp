// Interior-point solver for one jerk-limited window.
// mm, s.
#include "core/plan/jerk_solver.h"

#include <algorithm>
#include <cmath>

#include "core/numeric/banded.h"

namespace kf::plan {
namespace {

constexpr int kMostSteps = 120;
constexpr double kStayInside = 0.99;       // part of the way to the nearest row that one step may go
constexpr double kComplementarity = 1e-7;  // of the time, at the end
constexpr double kNoCap = 1e200;

class Solver {
 public:
  Solver(JerkWindow& window, RunControl& control) : w_(window), control_(control), n_(window.cells.size()) {
    b_.assign(n_ + 2, 0.0);
    delta_ = trial_ = b_;
    t_.assign(n_ + 1, 0.0);
    dt_ = tTrial_ = tMultiplier_ = t_;
    matrix_.resize(n_ + 2);
    right_.resize(n_ + 2);
    folded_.resize(n_);
    foldedRight_.resize(n_);
    coupling_.resize(n_ + 1);
    pivot_.resize(n_ + 1);
    tRight_.resize(n_ + 1);
  }

  JerkSolution run() {
    JerkSolution solution;
    startFromRest();
    relaxed_ = false;
    startMultipliers(1.0);
    solution.steps = iterate();
    report(solution);
    for (double& b : b_) b *= 0.98;  // away from the rows, so that the second run can begin
    relaxed_ = true;
    startMultipliers(0.03);
    solution.steps += iterate();
    solution.lowerBound = lowerBound();
    return solution;
  }

 private:
  // --- what is linear in b
  // ------------------------------------------------------------------------------------------- Extended
  // coefficients: index 0 and n + 1 are the ghosts; node j's window begins at index j - 1.
  void setGhosts(std::vector<double>& b) const {
    b[0] = w_.startGhost * b[1];
    b[n_ + 1] = w_.endGhost * b[n_];
  }
  double qAt(const std::vector<double>& b, std::size_t j) const {
    return w_.nodes[j].q[0] * b[j] + w_.nodes[j].q[1] * b[j + 1];
  }
  double middleAt(const std::vector<double>& b, std::size_t j) const {
    const auto& m = w_.cells[j].middle;
    return m[0] * b[j] + m[1] * b[j + 1] + m[2] * b[j + 2];
  }
  double rowAt(const std::vector<double>& b, std::size_t j, const TwoSided& row) const {
    double sum = row.a[1] * b[j] + row.a[2] * b[j + 1];
    if (j > 0) sum += row.a[0] * b[j - 1];
    if (j < n_) sum += row.a[3] * b[j + 2];
    return sum;
  }

  // --- starting points
  // ----------------------------------------------------------------------------------------------- q ~ (s (L
  // - s) / L)^(4/3), which leaves and reaches rest at constant jerk, scaled into the rows.
  void startFromRest() {
    const double length = w_.startRamp + (w_.s.back() - w_.s.front()) + w_.endRamp;
    for (std::size_t j = 0; j < n_; ++j) {
      const double s = w_.startRamp + 0.5 * (w_.s[j] + w_.s[j + 1]) - w_.s.front();
      b_[j + 1] = std::pow(s * (length - s) / length, 4.0 / 3.0);
    }
    setGhosts(b_);
    scaleInto(0.8);
  }

  // Scales b so that every true row holds with room: q by f scales accelerations by f and jerks by f^(3/2).
  void scaleInto(double part) {
    double f = HUGE_VAL;
    for (std::size_t j = 0; j <= n_; ++j) {
      const JerkNode& node = w_.nodes[j];
      const double q = qAt(b_, j);
      f = std::min(f, node.cap / q);
      for (std::size_t r = node.firstRow; r < node.firstRow + node.rows; ++r) {
        const TwoSided& row = w_.rows[r];
        const double value = std::abs(rowAt(b_, j, row));
        if (value > 0.0)
          f = std::min(
              f, row.jerk ? std::pow(row.limit / (value * std::sqrt(q)), 2.0 / 3.0) : row.limit / value);
      }
    }
    for (double& b : b_) b *= part * f;
  }

  void startMultipliers(double part) {
    std::size_t count = 0;
    for (std::size_t j = 0; j <= n_; ++j) t_[j] = 1.0 / std::sqrt(qAt(b_, j));
    if (relaxed_) {
      for (std::size_t j = 0; j <= n_; ++j) t_[j] *= 1.02;
    }
    mu_ = 1.0;
    eachRow(b_, t_, [&](double) { ++count; });
    rowsInAll_ = static_cast<double>(count);
    mu_ = part * time(b_, t_) / rowsInAll_;
    std::size_t i = 0;
    for (std::size_t j = 0; j <= n_; ++j) {
      JerkNode& node = w_.nodes[j];
      const double q = qAt(b_, j);
      if (node.cap < kNoCap) node.capMultiplier = mu_ / (node.cap - q);
      for (std::size_t r = node.firstRow; r < node.firstRow + node.rows; ++r, ++i) {
        TwoSided& row = w_.rows[r];
        const double value = rowAt(b_, j, row), limit = row.jerk ? row.limit * t_[j] : row.limit;
        row.low = mu_ / (limit + value);
        row.high = mu_ / (limit - value);
      }
      if (relaxed_) tMultiplier_[j] = mu_ / (t_[j] - 1.0 / std::sqrt(q));
    }
  }

  // Calls visit(slack) for each one-sided row.
  template <class Visit>
  void eachRow(const std::vector<double>& b, const std::vector<double>& t, const Visit& visit) const {
    for (std::size_t j = 0; j <= n_; ++j) {
      const JerkNode& node = w_.nodes[j];
      const double q = qAt(b, j);
      if (node.cap < kNoCap) visit(node.cap - q);
      for (std::size_t r = node.firstRow; r < node.firstRow + node.rows; ++r) {
        const TwoSided& row = w_.rows[r];
        const double value = rowAt(b, j, row), limit = row.jerk ? row.limit * t[j] : row.limit;
        visit(limit - value);
        visit(limit + value);
      }
      if (relaxed_) visit(t[j] - 1.0 / std::sqrt(q));
    }
  }

  double time(const std::vector<double>& b, const std::vector<double>& t) const {
    double sum = 0.0;
    for (std::size_t j = 0; j <= n_; ++j) sum += w_.nodes[j].weight * t[j];
    for (std::size_t j = 0; j < n_; ++j) sum += w_.cells[j].weight / std::sqrt(middleAt(b, j));
    return sum;
  }

  // --- one Newton step
  // -----------------------------------------------------------------------------------------------
  void addOuter(std::size_t start, const double* v, std::size_t count, double weight) {
    for (std::size_t a = 0; a < count; ++a) {
      if (v[a] == 0.0) continue;
      for (std::size_t b = a; b < count; ++b) matrix_[start + a][b - a] += weight * v[a] * v[b];
    }
  }

  // Assembles the condensed Newton system for the current multipliers and barrier mu.
  void assemble() {
    for (auto& row : matrix_) row.fill(0.0);
    std::fill(right_.begin(), right_.end(), 0.0);
    for (std::size_t j = 0; j <= n_; ++j) assembleNode(j);
    for (std::size_t j = 0; j < n_; ++j) {
      const JerkCell& cell = w_.cells[j];
      const double q = middleAt(b_, j), root = 1.0 / std::sqrt(q);
      addOuter(j, cell.middle.data(), 3, 0.75 * cell.weight * root / (q * q));
      for (std::size_t k = 0; k < 3; ++k) right_[j + k] += 0.5 * cell.weight * root / q * cell.middle[k];
    }
  }

  void assembleNode(std::size_t j) {
    const JerkNode& node = w_.nodes[j];
    const double q = qAt(b_, j), root = 1.0 / std::sqrt(q), dRoot = -0.5 * root / q;  // of q^(-1/2) by q
    // Window of four; for the first node it would begin before the array, for the last end behind it.
    const std::size_t start = j == 0 ? 0 : j - 1, skip = j == 0 ? 1 : 0, count = 4 - skip - (j == n_ ? 1 : 0);
    double qc[4] = {0.0, node.q[0], node.q[1], 0.0};
    double pivot = 0.0, tRight = -node.weight;
    double e[4] = {};
    double curvature = relaxed_ ? 0.0 : node.weight;  // multiplies (q^(-1/2))''
    double qRight = relaxed_ ? 0.0 : -node.weight * dRoot;
    double qq = 0.0;  // weight of qc qc^T
    if (node.cap < kNoCap) {
      const double slack = node.cap - q;
      qq += node.capMultiplier / slack;
      qRight -= mu_ / slack;
    }
    for (std::size_t r = node.firstRow; r < node.firstRow + node.rows; ++r) {
      const TwoSided& row = w_.rows[r];
      const double value = rowAt(b_, j, row), limit = row.jerk ? row.limit * t_[j] : row.limit;
      const double slackHigh = limit - value, slackLow = limit + value;
      const double wHigh = row.high / slackHigh, wLow = row.low / slackLow;
      const double bHigh = mu_ / slackHigh, bLow = mu_ / slackLow;
      if (row.jerk && !relaxed_) {
        // The slack also moves with q through limit q^(-1/2).
        double high[4], low[4];
        for (std::size_t k = 0; k < 4; ++k) {
          high[k] = row.limit * dRoot * qc[k] - row.a[k];
          low[k] = row.limit * dRoot * qc[k] + row.a[k];
        }
        addOuter(start, high + skip, count, wHigh);
        addOuter(start, low + skip, count, wLow);
        for (std::size_t k = 0; k < count; ++k)
          right_[start + k] += bHigh * high[k + skip] + bLow * low[k + skip];
        curvature -= (row.high + row.low) * row.limit;
        continue;
      }
      addOuter(start, row.a.data() + skip, count, wHigh + wLow);
      for (std::size_t k = 0; k < count; ++k) right_[start + k] += (bLow - bHigh) * row.a[k + skip];
      if (row.jerk) {
        pivot += (wHigh + wLow) * row.limit * row.limit;
        tRight += (bHigh + bLow) * row.limit;
        for (std::size_t k = 0; k < 4; ++k) e[k] += (wLow - wHigh) * row.limit * row.a[k];
      }
    }
    if (relaxed_) {
      const double slack = t_[j] - root, weight = tMultiplier_[j] / slack;
      pivot += weight;
      tRight += mu_ / slack;
      qRight -= mu_ / slack * dRoot;
      qq += weight * dRoot * dRoot;
      for (std::size_t k = 0; k < 4; ++k) e[k] -= weight * dRoot * qc[k];
      curvature += tMultiplier_[j];
    }
    qq += std::max(0.0, curvature) * 0.75 * root / (q * q);
    addOuter(start, qc + skip, count, qq);
    for (std::size_t k = 0; k < count; ++k) right_[start + k] += qRight * qc[k + skip];
    if (!relaxed_) return;
    addOuter(start, e + skip, count, -1.0 / pivot);
    for (std::size_t k = 0; k < count; ++k) right_[start + k] -= e[k + skip] * tRight / pivot;
    pivot_[j] = pivot;
    tRight_[j] = tRight;
    std::copy(e, e + 4, coupling_[j].begin());
  }

  // Folds the ghosts into their neighbours, solves, and unfolds.
  void solve() {
    const double a = w_.startGhost, z = w_.endGhost;
    const std::size_t last = n_ + 1;
    const auto at = [this](std::size_t i, std::size_t j) -> double& { return matrix_[i][j - i]; };
    at(1, 1) += 2.0 * a * at(0, 1) + a * a * at(0, 0);
    for (std::size_t k = 2; k <= 3 && k <= last; ++k) at(1, k) += a * at(0, k);
    right_[1] += a * right_[0];
    at(n_, n_) += 2.0 * z * at(n_, last) + z * z * at(last, last);
    for (std::size_t k = 1; k <= 2 && k < n_; ++k) at(n_ - k, n_) += z * at(n_ - k, last);
    right_[n_] += z * right_[last];
    for (std::size_t i = 0; i < n_; ++i) {
      folded_[i] = matrix_[i + 1];
      for (std::size_t k = 1; k <= numeric::kBand; ++k) {
        if (i + k >= n_) folded_[i][k] = 0.0;
      }
      foldedRight_[i] = right_[i + 1];
    }
    numeric::solveBanded(folded_, foldedRight_);
    for (std::size_t i = 0; i < n_; ++i) delta_[i + 1] = foldedRight_[i];
    setGhosts(delta_);
    if (!relaxed_) return;
    for (std::size_t j = 0; j <= n_; ++j) {
      const auto& e = coupling_[j];
      double sum = e[1] * delta_[j] + e[2] * delta_[j + 1];
      if (j > 0) sum += e[0] * delta_[j - 1];
      if (j < n_) sum += e[3] * delta_[j + 2];
      dt_[j] = (tRight_[j] - sum) / pivot_[j];
    }
  }

  // The longest step that keeps every slack above a hundredth of what it is. In the true problem t follows b.
  double longestStep() {
    double step = 1.0;
    const auto shorten = [&step](double slack, double change) {
      if (change < 0.0) step = std::min(step, -kStayInside * slack / change);
    };
    for (std::size_t j = 0; j <= n_; ++j) {
      const JerkNode& node = w_.nodes[j];
      const double q = qAt(b_, j), dq = qAt(delta_, j);
      if (node.cap < kNoCap) shorten(node.cap - q, -dq);
      shorten(q, dq);
      const double dLimit = relaxed_ ? dt_[j] : -0.5 * dq / (q * std::sqrt(q));
      for (std::size_t r = node.firstRow; r < node.firstRow + node.rows; ++r) {
        const TwoSided& row = w_.rows[r];
        const double value = rowAt(b_, j, row), change = rowAt(delta_, j, row);
        const double limit = row.jerk ? row.limit * t_[j] : row.limit,
                     dl = row.jerk ? row.limit * dLimit : 0.0;
        shorten(limit - value, dl - change);
        shorten(limit + value, dl + change);
      }
    }
    for (std::size_t j = 0; j < n_; ++j) shorten(middleAt(b_, j), middleAt(delta_, j));
    return step;
  }

  bool tryStep(double step) {
    for (std::size_t i = 0; i < b_.size(); ++i) trial_[i] = b_[i] + step * delta_[i];
    for (std::size_t j = 0; j < n_; ++j) {
      if (!(middleAt(trial_, j) > 0.0)) return false;
    }
    for (std::size_t j = 0; j <= n_; ++j) {
      const double q = qAt(trial_, j);
      if (!(q > 0.0)) return false;
      const double root = 1.0 / std::sqrt(q);
      // q^(-1/2) bends away from its tangent; t makes way for it. That only loosens the jerk rows.
      tTrial_[j] = relaxed_
                       ? std::max(t_[j] + step * dt_[j], root + 0.05 * (t_[j] - 1.0 / std::sqrt(qAt(b_, j))))
                       : root;
    }
    bool inside = true;
    eachRow(trial_, tTrial_, [&inside](double slack) { inside = inside && slack > 0.0; });
    return inside;
  }

  // New multipliers from  (multiplier + d)(slack + ds) = mu, linearised; they take a step of their own.
  void moveMultipliers(double primalStep) {
    double step = 1.0;
    const auto each = [&](const auto& act) {
      for (std::size_t j = 0; j <= n_; ++j) {
        JerkNode& node = w_.nodes[j];
        const double q = qAt(b_, j), dq = qAt(delta_, j), root = 1.0 / std::sqrt(q);
        if (node.cap < kNoCap) act(node.capMultiplier, node.cap - q, -dq);
        const double dLimit = relaxed_ ? dt_[j] : -0.5 * dq * root / q;
        for (std::size_t r = node.firstRow; r < node.firstRow + node.rows; ++r) {
          TwoSided& row = w_.rows[r];
          const double value = rowAt(b_, j, row), change = rowAt(delta_, j, row);
          const double limit = row.jerk ? row.limit * t_[j] : row.limit,
                       dl = row.jerk ? row.limit * dLimit : 0.0;
          act(row.high, limit - value, dl - change);
          act(row.low, limit + value, dl + change);
        }
        if (relaxed_) act(tMultiplier_[j], t_[j] - root, dt_[j] + 0.5 * dq * root / q);
      }
    };
    const auto changeOf = [this](double multiplier, double slack, double ds) {
      return (mu_ - multiplier * ds) / slack - multiplier;
    };
    each([&](double multiplier, double slack, double ds) {
      const double d = changeOf(multiplier, slack, ds);
      if (d < 0.0) step = std::min(step, -kStayInside * multiplier / d);
    });
    each([&](double& multiplier, double slack, double ds) {
      multiplier += step * changeOf(multiplier, slack, ds);
    });
    lastDualStep_ = step;
    lastPrimalStep_ = primalStep;
  }

  double complementarity() const {
    double sum = 0.0;
    for (std::size_t j = 0; j <= n_; ++j) {
      const JerkNode& node = w_.nodes[j];
      const double q = qAt(b_, j);
      if (node.cap < kNoCap) sum += node.capMultiplier * (node.cap - q);
      for (std::size_t r = node.firstRow; r < node.firstRow + node.rows; ++r) {
        const TwoSided& row = w_.rows[r];
        const double value = rowAt(b_, j, row), limit = row.jerk ? row.limit * t_[j] : row.limit;
        sum += row.high * (limit - value) + row.low * (limit + value);
      }
      if (relaxed_) sum += tMultiplier_[j] * (t_[j] - 1.0 / std::sqrt(q));
    }
    return sum;
  }

  int iterate() {
    int steps = 0;
    lastPrimalStep_ = lastDualStep_ = 0.0;
    double before = HUGE_VAL;
    for (; steps < kMostSteps && !control_.isCancelled(); ++steps) {
      const double now = time(b_, t_), left = complementarity();
      if (left <= kComplementarity * now && std::abs(before - now) <= 1e-8 * now) break;
      // The barrier shrinks once the centre is reached: long steps, and a time that no longer falls by much
      // of what is left to gain. Short steps mean that the rows are too near: it grows again.
      const double reached = std::min(lastPrimalStep_, lastDualStep_), toGain = mu_ * rowsInAll_;
      const bool settled = std::abs(before - now) < 0.2 * toGain;
      before = now;
      mu_ *= reached < 0.2 && steps > 0 ? 2.0
             : !settled                 ? 1.0
             : reached > 0.9            ? 0.1
             : reached > 0.7            ? 0.25
             : reached > 0.4            ? 0.6
                                        : 1.0;
      mu_ = std::clamp(mu_, 0.1 * kComplementarity * now / rowsInAll_, now / rowsInAll_);
      assemble();
      solve();
      double step = longestStep();
      int tries = 0;
      while (!tryStep(step) && ++tries < 40) step *= 0.6;
      if (tries == 40) break;
      moveMultipliers(step);
      b_.swap(trial_);
      t_.swap(tTrial_);
    }
    return steps;
  }

  // --- the bound
  // -----------------------------------------------------------------------------------------------------
  // With the multiplier of t >= q^(-1/2) set to weight - sum(multipliers * limit), the Lagrangian no longer
  // depends on t. It is convex in b, so it lies above its tangent at the current b; over the box of feasible
  // b the tangent falls by no more than sum |gradient| * reach.
  double lowerBound() {
    std::fill(right_.begin(), right_.end(), 0.0);  // the gradient
    double value = 0.0;
    for (std::size_t j = 0; j <= n_; ++j) {
      JerkNode& node = w_.nodes[j];
      const double q = qAt(b_, j), root = 1.0 / std::sqrt(q);
      double used = 0.0;
      for (std::size_t r = node.firstRow; r < node.firstRow + node.rows; ++r) {
        if (w_.rows[r].jerk) used += (w_.rows[r].high + w_.rows[r].low) * w_.rows[r].limit;
      }
      const double shrink = used > node.weight ? node.weight / used : 1.0;
      const double rest = node.weight - shrink * used;
      value += rest * root;
      double gq = -0.5 * rest * root / q;
      if (node.cap < kNoCap) {
        value -= node.capMultiplier * (node.cap - q);
        gq += node.capMultiplier;
      }
      right_[j] += gq * node.q[0];
      right_[j + 1] += gq * node.q[1];
      for (std::size_t r = node.firstRow; r < node.firstRow + node.rows; ++r) {
        const TwoSided& row = w_.rows[r];
        const double net = (row.high - row.low) * (row.jerk ? shrink : 1.0);
        value += net * rowAt(b_, j, row);
        if (!row.jerk) value -= (row.high + row.low) * row.limit;
        for (std::size_t k = 0; k < 4; ++k) {
          if ((j == 0 && k == 0) || (j == n_ && k == 3)) continue;
          right_[j + k - 1] += net * row.a[k];
        }
      }
    }
    for (std::size_t j = 0; j < n_; ++j) {
      const JerkCell& cell = w_.cells[j];
      const double q = middleAt(b_, j), root = 1.0 / std::sqrt(q);
      value += cell.weight * root;
      for (std::size_t k = 0; k < 3; ++k) right_[j + k] -= 0.5 * cell.weight * root / q * cell.middle[k];
    }
    right_[1] += w_.startGhost * right_[0];
    right_[n_] += w_.endGhost * right_[n_ + 1];
    for (std::size_t j = 0; j < n_; ++j) {
      const double width = w_.s[j + 1] - w_.s[j];
      const double reach =
          std::min(w_.nodes[j].cap, w_.nodes[j + 1].cap) + width * w_.steepest + std::abs(b_[j + 1]);
      value -= std::abs(right_[j + 1]) * reach;
    }
    return std::max(0.0, value);
  }

  void report(JerkSolution& solution) const {
    solution.usable = true;
    eachRow(b_, t_, [&solution](double slack) { solution.usable = solution.usable && slack >= 0.0; });
    for (std::size_t j = 0; j <= n_; ++j) {
      solution.q.push_back(qAt(b_, j));
      const JerkNode& node = w_.nodes[j];
      double most = 0.0;
      LimitName name = LimitName::tangentialJerk;
      for (std::size_t r = node.firstRow; r < node.firstRow + node.rows; ++r) {
        const TwoSided& row = w_.rows[r];
        const double use = std::abs(rowAt(b_, j, row)) / (row.jerk ? row.limit * t_[j] : row.limit);
        if (use > most) {
          most = use;
          name = row.name;
        }
      }
      solution.limitedBy.push_back(name);
      solution.capped.push_back(qAt(b_, j) / node.cap > most);
      const double before = j == 0 ? w_.s[1] - w_.s[0] : w_.s[j] - w_.s[j - 1];
      const double after = j == n_ ? before : w_.s[j + 1] - w_.s[j];
      solution.slope.push_back(2.0 * (b_[j + 1] - b_[j]) / (j == 0 ? 2.0 * after : before + after));
    }
  }

  JerkWindow& w_;
  RunControl& control_;
  std::size_t n_;
  bool relaxed_ = true;
  double mu_ = 1.0, rowsInAll_ = 1.0, lastPrimalStep_ = 0.0, lastDualStep_ = 0.0;
  std::vector<double> b_, delta_, trial_, right_, t_, dt_, tTrial_, tMultiplier_, pivot_, tRight_,
      foldedRight_;
  std::vector<numeric::BandRow> matrix_, folded_;
  std::vector<std::array<double, 4>> coupling_;
};

}  // namespace

JerkSolution solveJerkWindow(JerkWindow& window, RunControl& control) {
  return Solver(window, control).run();
}

}  // namespace kf::plan
