// What raising each limit would save, by planning again.
// mm, s.
#include <algorithm>
#include <functional>
#include <optional>

#include "core/plan/plan.h"

namespace kf::plan {
namespace {

struct Knob {
  LimitName name;
  std::function<std::optional<double>*(limits::Limits&)> value;
  bool inverse = false;  // raising the limit means lowering the number (a period)
};

std::vector<Knob> knobs() {
  using limits::Limits;
  return {
      {LimitName::feed, [](Limits& l) { return &l.feed; }},
      {LimitName::axisSpeedX, [](Limits& l) { return &l.x.speed; }},
      {LimitName::axisSpeedY, [](Limits& l) { return &l.y.speed; }},
      {LimitName::centripetal, [](Limits& l) { return &l.centripetalAcceleration; }},
      {LimitName::chord, [](Limits& l) { return &l.chordTolerance; }},
      {LimitName::blockPeriod, [](Limits& l) { return &l.blockPeriod; }, true},
      {LimitName::contourError, [](Limits& l) { return &l.contourError; }},
      {LimitName::chipLoad, [](Limits& l) { return l.feedPerTooth ? &l.feedPerTooth : &l.chipThickness; }},
      {LimitName::axisAccelerationX, [](Limits& l) { return &l.x.acceleration; }},
      {LimitName::axisAccelerationY, [](Limits& l) { return &l.y.acceleration; }},
      {LimitName::tangentialAcceleration, [](Limits& l) { return &l.tangentialAcceleration; }},
      {LimitName::axisJerkX, [](Limits& l) { return &l.x.jerk; }},
      {LimitName::axisJerkY, [](Limits& l) { return &l.y.jerk; }},
      {LimitName::tangentialJerk, [](Limits& l) { return &l.tangentialJerk; }},
      {LimitName::normalJerk, [](Limits& l) { return &l.normalJerk; }},
  };
}

}  // namespace

Result<std::vector<Price>> prices(const path::Path& path, const limits::Limits& limits,
                                  const Options& options, double changePercent, RunControl& control) {
  auto base = makePlan(path, limits, options, control);
  if (!base) return base.error();
  const double factor = 1.0 + changePercent / 100.0;
  std::vector<Price> list;
  for (const Knob& knob : knobs()) {
    limits::Limits raised = limits;
    std::optional<double>* value = knob.value(raised);
    if (!value->has_value()) continue;
    const bool jerk = knob.name == LimitName::axisJerkX || knob.name == LimitName::axisJerkY ||
                      knob.name == LimitName::tangentialJerk;
    if (jerk && options.law == Law::acceleration) continue;
    *value = knob.inverse ? **value / factor : **value * factor;
    auto plan = makePlan(path, raised, options, control);
    if (!plan) return plan.error();
    list.push_back({knob.name, changePercent, base->time - plan->time});
  }
  std::stable_sort(list.begin(), list.end(),
                   [](const Price& a, const Price& b) { return a.timeSaved > b.timeSaved; });
  return list;
}

}  // namespace kf::plan
