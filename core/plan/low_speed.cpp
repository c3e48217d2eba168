// Where a plan is slower than the cut wants.
// mm, s.
#include "core/plan/low_speed.h"

#include <algorithm>
#include <array>
#include <cmath>

namespace kf::plan {
namespace {

// Arc length in the cell [s0, s1] at which the speed passes `lower`, by bisection on the time law.
double crossing(const schedule::Schedule& schedule, double s0, double s1, double lower, bool rising) {
  double low = s0, high = s1;
  for (int step = 0; step < 60 && high - low > 1e-13 * s1; ++step) {
    const double middle = 0.5 * (low + high);
    const bool above = schedule.atLength(middle).v >= lower;
    (above == rising ? high : low) = middle;
  }
  return 0.5 * (low + high);
}

}  // namespace

std::vector<LowSpeedStretch> lowSpeedStretches(const schedule::Schedule& schedule, double lower) {
  std::vector<LowSpeedStretch> found;
  if (schedule.isEmpty()) return found;
  const auto &s = schedule.s(), &q = schedule.q();
  const double least = lower * lower * (1.0 - 1e-9);
  std::array<double, kLimitNameCount> share{};
  bool open = false;
  const auto close = [&](double at) {
    LowSpeedStretch& stretch = found.back();
    stretch.to = at;
    stretch.time = schedule.atLength(at).t - schedule.atLength(stretch.from).t;
    const auto most = std::max_element(share.begin(), share.end()) - share.begin();
    stretch.limitedBy = static_cast<LimitName>(most);
    share.fill(0.0);
    open = false;
  };
  for (std::size_t i = 0; i < s.size(); ++i) {
    const bool low = q[i] < least;
    if (low && !open) {
      found.push_back({i == 0 ? 0.0 : crossing(schedule, s[i - 1], s[i], lower, false), 0.0, 0.0,
                       std::sqrt(q[i]), LimitName::stop});
      open = true;
    } else if (!low && open) {
      close(crossing(schedule, s[i - 1], s[i], lower, true));
    }
    if (!open) continue;
    found.back().slowest = std::min(found.back().slowest, std::sqrt(q[i]));
    if (i + 1 < s.size())
      share[static_cast<std::size_t>(schedule.limitedBy()[i])] += schedule.t()[i + 1] - schedule.t()[i];
  }
  if (open) close(s.back());
  return found;
}

}  // namespace kf::plan
