// What the document asks for in the background: open, make the driven paths, plan, price. Values in, values
// out. mm, s.
#pragma once

#include <QString>
#include <memory>
#include <vector>

#include "core/pipeline/pipeline.h"

namespace kf::ui {

using PlanPtr = std::shared_ptr<const pipeline::PlannedContour>;

// One plan a driven contour; null where these limits allow none, and then `problem` says why.
struct Planned {
  std::vector<PlanPtr> plans;
  QString problem;
};

struct Opened {
  std::shared_ptr<const pipeline::OpenedDrawing> drawing;
  std::vector<pipeline::PreparedContour> prepared;
};

// The nodes that all contours of a drawing share, so that a large one stays live.
std::size_t nodesPerContour(std::size_t contours);

// Whether the driven path is another one under the other limits and choices.
bool drivesAlike(const limits::Limits& limits, const pipeline::PlanOptions& choices,
                 const limits::Limits& otherLimits, const pipeline::PlanOptions& otherChoices);

Result<Opened> openAll(const std::string& file, const pipeline::OpenOptions& options,
                       const limits::Limits& limits, const pipeline::PlanOptions& choices,
                       RunControl& control);
Result<std::vector<pipeline::PreparedContour>> prepareAll(const pipeline::OpenedDrawing& drawing,
                                                          const limits::Limits& limits,
                                                          const pipeline::PlanOptions& choices,
                                                          RunControl& control);
// Fails  cancelled; a contour that can't be driven is a null plan and a problem instead.
Result<Planned> planAll(const std::vector<pipeline::PreparedContour>& prepared, const limits::Limits& limits,
                        const pipeline::PlanOptions& choices, RunControl& control);
// Over all contours, largest first.
Result<std::vector<plan::Price>> priceAll(const std::vector<pipeline::PreparedContour>& prepared,
                                          const limits::Limits& limits, const pipeline::PlanOptions& choices,
                                          RunControl& control);

}  // namespace kf::ui
