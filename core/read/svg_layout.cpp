// The page of an SVG drawing.
// Lengths in the page's own unit.
#include "core/read/svg_layout.h"

#include <array>
#include <cmath>
#include <utility>

#include <fmt/format.h>

namespace kf::read::svg {
namespace {

using curve::Affine2;

struct Unit {
  LengthUnit unit;
  std::string_view name;
  double millimetres;
};
// CSS Values and Units: 1 in = 25.4 mm = 96 px = 72 pt = 6 pc; 1 Q = 0.25 mm.
constexpr std::array<Unit, 7> kUnits = {{{LengthUnit::px, "px", 25.4 / 96.0},
                                         {LengthUnit::in, "in", 25.4},
                                         {LengthUnit::mm, "mm", 1.0},
                                         {LengthUnit::cm, "cm", 10.0},
                                         {LengthUnit::q, "Q", 0.25},
                                         {LengthUnit::pt, "pt", 25.4 / 72.0},
                                         {LengthUnit::pc, "pc", 25.4 / 6.0}}};

const Unit& unitOf(LengthUnit unit) {
  for (const Unit& one : kUnits) {
    if (one.unit == unit) return one;
  }
  return kUnits[0];
}

Error bad(std::string_view what, std::string_view value) {
  return {ErrorCode::cannotRead, fmt::format("its {} \"{}\" is not understood; correct it", what, value)};
}

// The page's width or height as written: empty when it is left to the surroundings (none, auto, percent).
Result<std::optional<Length>> pageLength(const Declared& root, Property property) {
  const std::string_view text = root.get(property).value_or("");
  if (text.empty() || text == "auto") return std::optional<Length>();
  const auto length = parseLength(text);
  if (!length) return bad(nameOf(property), text);
  if (length->unit == LengthUnit::percent) return std::optional<Length>();
  if (!(length->value > 0.0)) {
    return Error{ErrorCode::cannotRead,
                 fmt::format("its {} \"{}\" is not positive, so nothing of it shows; correct it",
                             nameOf(property), text)};
  }
  return std::optional(*length);
}

}  // namespace

std::optional<double> resolve(std::string_view text, double whole) {
  const auto length = parseLength(text);
  if (!length) return std::nullopt;
  if (length->unit == LengthUnit::percent) return length->value / 100.0 * whole;
  return length->value * pixelsPer(length->unit);
}

Result<Page> layOut(const Declared& root, std::string_view viewBox, std::string_view fitText) {
  auto width = pageLength(root, Property::width);
  if (!width) return width.error();
  auto height = pageLength(root, Property::height);
  if (!height) return height.error();
  const auto fit = parseFit(fitText);
  if (!fit) return bad("preserveAspectRatio", fitText);
  std::optional<ViewBox> box;
  if (!stripped(viewBox).empty()) {
    box = parseViewBox(viewBox);
    if (!box) return bad("viewBox", viewBox);
    if (!(box->width > 0.0 && box->height > 0.0)) {
      return Error{
          ErrorCode::cannotRead,
          fmt::format("its viewBox \"{}\" has no area, so nothing of it shows; correct it", viewBox)};
    }
  }
  const LengthUnit base = *width && (**width).unit != LengthUnit::px ? (**width).unit
                          : *height                                  ? (**height).unit
                          : *width                                   ? (**width).unit
                                                                     : LengthUnit::px;
  Page page;
  page.unit = unitOf(base).name;
  page.millimetres = unitOf(base).millimetres;
  page.physical = base != LengthUnit::px;
  const auto inBase = [base](const Length& length) {
    return length.unit == base ? length.value : length.value * pixelsPer(length.unit) / pixelsPer(base);
  };
  std::optional<double> w, h;
  if (*width) w = inBase(**width);
  if (*height) h = inBase(**height);
  if (box) {
    // A side left open follows the other by the box's proportions; with both open a user unit is a pixel.
    if (!w && !h) w = box->width;
    if (!w) w = *h * box->width / box->height;
    if (!h) h = *w * box->height / box->width;
    page.map = fitMap(*box, *fit, 0.0, 0.0, *w, *h);
    page.viewport = {box->width, box->height};
  } else {
    const double scale = 1.0 / pixelsPer(base);
    page.map = Affine2::scaling(scale, scale);
    page.viewport = {w.value_or(0.0) / scale, h.value_or(0.0) / scale};
  }
  page.map = Affine2{1.0, 0.0, 0.0, -1.0, 0.0, h.value_or(0.0)} * page.map;
  const double size = std::abs(page.map.xx) + std::abs(page.map.yy) + std::abs(page.map.dx);
  if (!std::isfinite(size) || !std::isfinite(page.map.dy) || page.map.determinant() == 0.0)
    return bad("page size or viewBox", viewBox);
  return page;
}

}  // namespace kf::read::svg
