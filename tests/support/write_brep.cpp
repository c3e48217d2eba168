// Writes a drawing (mm) as STEP or IGES, by the ending: how samples/*.step and *.igs were made from their
// DXF. Lengths in mm.
#include <cstdio>
#include <filesystem>
#include <string>
#include <vector>

#include "core/read/drawing.h"
#include "tests/support/brep_writing.h"

int main(int count, char** arguments) {
  if (count != 3) {
    std::fputs("usage: write_brep DRAWING OUT.step|OUT.igs\n", stderr);
    return 2;
  }
  kf::RunControl control;
  const auto drawing = kf::read::readDrawing(arguments[1], {}, control);
  if (!drawing) {
    std::fprintf(stderr, "%s\n", drawing.error().message.c_str());
    return 3;
  }
  std::vector<kf::curve::Curve> curves;
  for (const auto& loose : drawing->curves) curves.push_back(loose.curve);
  const std::string path = arguments[2];
  const std::string title = std::filesystem::path(path).stem().string();
  const TopoDS_Compound shape = kf::test::shapeOf(curves, gp_Trsf());
  const bool written =
      path.ends_with(".igs") ? kf::test::writeIges(shape, path) : kf::test::writeStep(shape, path, title);
  return written ? 0 : 4;
}
