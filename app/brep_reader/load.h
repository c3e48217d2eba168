// A STEP or IGES file as shapes, checked for what the library leaves out without a word.
// Lengths in mm.
#pragma once

#include <TopoDS_Shape.hxx>

#include <string>
#include <vector>

#include "core/base/result.h"
#include "core/read/drawing.h"

namespace kf::brep {

enum class Format { step, iges };

struct LoadedShape {
  TopoDS_Shape shape;
  std::string layer;  // "level 3" of IGES, else empty
};

struct Loaded {
  std::vector<LoadedShape> shapes;
  std::vector<read::Skipped> skipped, ignored;
  std::string unit;  // the file's own, "" when it does not say or it is mm
};

// Fails  cannotRead   the library can't parse it, the model's own check fails, or fewer edges came out than
//                     the file holds.
//        unsupported  it holds nothing that could be an edge.
Result<Loaded> load(const std::string& path, Format format);

// Everything in one plane, as a drawing in mm.
// Fails  as load and planeOf; unsupported: not flat, with the deviation.
Result<read::Drawing> drawingOf(const std::string& path, Format format);

}  // namespace kf::brep
