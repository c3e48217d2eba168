// The page of an SVG drawing: its size, its unit, and the map from user units to the page; internal to read.
// Lengths in the page's own unit.
#pragma once

#include <optional>
#include <string>
#include <string_view>

#include "core/base/result.h"
#include "core/curve/vec2.h"
#include "core/read/svg_scan.h"
#include "core/read/svg_style.h"

namespace kf::read::svg {

// The rectangle that percentages refer to, in user units.
struct Viewport {
  double width = 0.0, height = 0.0;
};

struct Page {
  std::string unit;          // "mm", "in", ... or "px" when no physical size is given
  double millimetres = 1.0;  // per unit
  bool physical = false;
  curve::Affine2 map;  // from user units to the page: y upwards, origin at the lower left corner when the
                       // page's height is known, else at the drawing's own
  Viewport viewport;
};

// A size or place of an element: px of an absolute length, or the share of `whole` for a percentage.
// Empty for a unit that is not known here.
std::optional<double> resolve(std::string_view text, double whole);

// Fails  cannotRead  a viewBox, preserveAspectRatio, width or height that is not understood, or not positive.
Result<Page> layOut(const Declared& root, std::string_view viewBox, std::string_view fit);

}  // namespace kf::read::svg
