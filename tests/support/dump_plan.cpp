// Prints the nodes of a drawing's first contour and the planned v^2 there, for checkers in other languages.
// mm, s.
#include <cstdio>
#include <string>

#include <fmt/format.h>
#include <nlohmann/json.hpp>

#include "core/limits/limits.h"
#include "core/pipeline/pipeline.h"

// Usage: dump_plan DRAWING LIMITS NODES
int main(int argc, char** argv) {
  using namespace kf;
  if (argc != 4) return 2;
  RunControl control;
  pipeline::OpenOptions opening;
  opening.millimetresPerUnit = 1.0;
  const auto drawing = pipeline::openDrawing(argv[1], opening, control);
  const auto limits = limits::readLimitsFile(argv[2]);
  if (!drawing || !limits) {
    std::fprintf(stderr, "%s\n", (drawing ? limits.error() : drawing.error()).message.c_str());
    return 3;
  }
  pipeline::PlanOptions options;
  options.law = plan::Law::acceleration;
  options.targetNodes = std::stoul(argv[3]);
  const auto prepared = pipeline::prepareContour(drawing->contours.front(), 1, options, control);
  if (!prepared) return 3;
  const auto planned = pipeline::planContour(*prepared, *limits, options, false, control);
  if (!planned) return 1;
  const path::Path& path = *planned->path;
  std::vector<int> breaks;
  for (path::BreakKind kind : path.breakAfter) breaks.push_back(static_cast<int>(kind));
  std::vector<double> midTx, midTy, midK;  // exact geometry half-way through each cell
  for (std::size_t i = 0; i + 1 < path.size(); ++i) {
    const path::Sample middle = path.sample(0.5 * (path.s[i] + path.s[i + 1]));
    midTx.push_back(middle.tx);
    midTy.push_back(middle.ty);
    midK.push_back(middle.k);
  }
  const nlohmann::json json = {{"s", path.s},
                               {"tx", path.tx},
                               {"ty", path.ty},
                               {"k", path.k},
                               {"mid_tx", midTx},
                               {"mid_ty", midTy},
                               {"mid_k", midK},
                               {"cap_q", planned->plan.caps.q},
                               {"break_after", breaks},
                               {"q", planned->plan.q},
                               {"time", planned->plan.time},
                               {"lower_bound", planned->plan.lowerBound},
                               {"closed", path.closed}};
  std::puts(json.dump().c_str());
  return 0;
}
