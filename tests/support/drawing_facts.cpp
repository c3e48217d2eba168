// Prints what a drawing came in as, for scripts that compare it with an independent reader.
// Lengths in the drawing's own unit, all digits.
#include <cstdio>
#include <cstring>
#include <string>

#include "core/curve/arc_length.h"
#include "core/read/drawing.h"

int main(int argc, char** argv) {
  kf::read::ReadOptions options;
  for (int i = 1; i < argc; ++i) {
    if (std::strcmp(argv[i], "--hatch") == 0) {
      options.hatchBoundaries = true;
      continue;
    }
    kf::RunControl control;
    const auto drawing = kf::read::readDrawing(argv[i], options, control);
    if (!drawing) {
      std::printf("{\"error\": \"%s\"}\n", drawing.error().message.c_str());
      continue;
    }
    double length = 0.0;
    kf::curve::Box box;
    for (const auto& loose : drawing->curves) {
      length += kf::curve::totalLength(loose.curve);
      box.include(loose.curve.bounds());
    }
    std::size_t skipped = 0, ignored = 0;
    for (const auto& row : drawing->skipped) skipped += row.count;
    for (const auto& row : drawing->ignored) ignored += row.count;
    std::printf(
        "{\"curves\": %zu, \"length\": %.17g, \"bounds\": [%.17g, %.17g, %.17g, %.17g], \"skipped\": %zu, "
        "\"ignored\": %zu, \"mm\": %.17g}\n",
        drawing->curves.size(), length, box.low.x, box.low.y, box.high.x, box.high.y, skipped, ignored,
        drawing->millimetresPerUnit.value_or(0.0));
  }
  return 0;
}
