// What the document asks for in the background.
// mm, s.
#include "ui/models/planning.h"

#include <QObject>
#include <algorithm>
#include <map>

namespace kf::ui {
namespace {

constexpr std::size_t kNodesInAll = 40'000, kMostNodes = 2000, kLeastNodes = 100;

bool sameChoice(const construct::JointChoice& a, const construct::JointChoice& b) {
  return a.before == b.before && a.blend == b.blend && a.tolerance == b.tolerance;
}

bool sameChoices(const pipeline::PlanOptions& a, const pipeline::PlanOptions& b) {
  return a.jointChoices.size() == b.jointChoices.size() &&
         std::equal(a.jointChoices.begin(), a.jointChoices.end(), b.jointChoices.begin(),
                    [](const auto& left, const auto& right) {
                      return left.first == right.first &&
                             std::equal(left.second.begin(), left.second.end(), right.second.begin(),
                                        right.second.end(), sameChoice);
                    });
}

}  // namespace

std::size_t nodesPerContour(std::size_t contours) {
  return std::clamp(kNodesInAll / std::max<std::size_t>(contours, 1), kLeastNodes, kMostNodes);
}

bool drivesAlike(const limits::Limits& limits, const pipeline::PlanOptions& choices,
                 const limits::Limits& otherLimits, const pipeline::PlanOptions& otherChoices) {
  return limits.pathTolerance == otherLimits.pathTolerance &&
         limits.toolDiameter == otherLimits.toolDiameter && limits.side == otherLimits.side &&
         choices.joints == otherChoices.joints && sameChoices(choices, otherChoices) &&
         pipeline::lawFor(limits, choices) == pipeline::lawFor(otherLimits, otherChoices);
}

Result<Opened> openAll(const std::string& file, const pipeline::OpenOptions& options,
                       const limits::Limits& limits, const pipeline::PlanOptions& choices,
                       RunControl& control) {
  auto drawing = pipeline::openDrawing(file, options, control);
  if (!drawing) return drawing.error();
  Opened result;
  result.drawing = std::make_shared<const pipeline::OpenedDrawing>(std::move(*drawing));
  auto prepared = prepareAll(*result.drawing, limits, choices, control);
  if (!prepared) return prepared.error();
  result.prepared = std::move(*prepared);
  return result;
}

Result<std::vector<pipeline::PreparedContour>> prepareAll(const pipeline::OpenedDrawing& drawing,
                                                          const limits::Limits& limits,
                                                          const pipeline::PlanOptions& choices,
                                                          RunControl& control) {
  pipeline::PlanOptions options = choices;
  options.targetNodes = nodesPerContour(drawing.contours.size());
  options.law = pipeline::lawFor(limits, choices);
  std::vector<pipeline::PreparedContour> all;
  int number = 0;
  for (const contour::Contour& contour : drawing.contours) {
    auto driven = pipeline::prepareDriven(contour, ++number, limits, options, control);
    if (!driven) return driven.error();
    for (pipeline::PreparedContour& one : *driven) all.push_back(std::move(one));
  }
  pipeline::numberParts(all, number);
  return all;
}

Result<Planned> planAll(const std::vector<pipeline::PreparedContour>& prepared, const limits::Limits& limits,
                        const pipeline::PlanOptions& choices, RunControl& control) {
  Planned result;
  std::size_t refused = 0;
  for (const pipeline::PreparedContour& one : prepared) {
    auto planned = pipeline::planContour(one, limits, choices, false, control);
    if (planned) {
      result.plans.push_back(std::make_shared<const pipeline::PlannedContour>(std::move(*planned)));
      continue;
    }
    if (planned.error().code == ErrorCode::cancelled) return planned.error();
    if (refused++ == 0) result.problem = QString::fromStdString(planned.error().message);
    result.plans.push_back(nullptr);
  }
  if (refused > 1) result.problem += QObject::tr(" (and %1 more contours without a plan)").arg(refused - 1);
  return result;
}

Result<std::vector<plan::Price>> priceAll(const std::vector<pipeline::PreparedContour>& prepared,
                                          const limits::Limits& limits, const pipeline::PlanOptions& choices,
                                          RunControl& control) {
  std::map<LimitName, double> saved;
  const plan::Options planning{pipeline::lawFor(limits, choices)};
  for (const pipeline::PreparedContour& one : prepared) {
    auto prices = plan::prices(*one.path, limits, planning, 10.0, control);
    if (!prices) return prices.error();
    for (const plan::Price& price : *prices) saved[price.limit] += price.timeSaved;
  }
  std::vector<plan::Price> list;
  for (const auto& [name, seconds] : saved) list.push_back({name, 10.0, seconds});
  std::stable_sort(list.begin(), list.end(),
                   [](const plan::Price& a, const plan::Price& b) { return a.timeSaved > b.timeSaved; });
  return list;
}

}  // namespace kf::ui
