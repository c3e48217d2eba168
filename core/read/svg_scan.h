// Small readers for the values inside SVG attributes: numbers, lengths, transforms, boxes; internal to read.
// Lengths in CSS pixels, angles in rad.
#pragma once

#include <array>
#include <cstddef>
#include <optional>
#include <string_view>
#include <vector>

#include "core/curve/vec2.h"

namespace kf::read::svg {

// Walks over the text of one attribute. Numbers have a decimal point in every locale.
class Scanner {
 public:
  explicit Scanner(std::string_view text) : text_(text) {}

  bool atEnd() const { return at_ >= text_.size(); }
  std::size_t at() const { return at_; }
  char peek() const { return atEnd() ? '\0' : text_[at_]; }
  void skipBlanks();
  // Blanks with at most one comma among them; true when there was a comma.
  bool skipSeparator();
  bool take(char c);
  // Letters, as many as follow.
  std::string_view word();
  std::string_view rest() const { return text_.substr(at_); }

  // A finite number as SVG writes it ("-.5", "+3", "1e-3"); stops where the next one begins. Empty, and
  // nothing consumed, when there is none.
  std::optional<double> number();
  // One character, 0 or 1.
  std::optional<bool> flag();

 private:
  std::string_view text_;
  std::size_t at_ = 0;
};

std::string_view stripped(std::string_view text);

// All numbers of a list separated by blanks and single commas; empty when anything else is in it.
std::optional<std::vector<double>> numberList(std::string_view text);

enum class LengthUnit { px, in, mm, cm, q, pt, pc, percent };
struct Length {
  double value = 0.0;
  LengthUnit unit = LengthUnit::px;  // a plain number counts as px
};
// Empty for a unit that depends on a font or window (em, ex, vw, ...) and for anything else.
std::optional<Length> parseLength(std::string_view text);
// CSS: 96 px an inch. Domain: not percent.
double pixelsPer(LengthUnit unit);

// A transform list of SVG, or of CSS with px and angle units: matrix, translate, scale, rotate, skew and
// their one-axis forms. Empty when it is not understood or not finite; "none" and "" are the identity.
std::optional<curve::Affine2> parseTransform(std::string_view text);

struct ViewBox {
  double x = 0.0, y = 0.0, width = 0.0, height = 0.0;
};
std::optional<ViewBox> parseViewBox(std::string_view text);

// preserveAspectRatio.
struct Fit {
  bool uniform = true;                // false: "none"
  bool slice = false;                 // cover instead of contain
  double alignX = 0.5, alignY = 0.5;  // 0 min, 0.5 mid, 1 max
};
std::optional<Fit> parseFit(std::string_view text);

// The map that places `box` into the rectangle at (x, y) of the given size.
// Source  SVG 2, 8.2 "Computing the equivalent transform of an SVG viewport".
curve::Affine2 fitMap(const ViewBox& box, const Fit& fit, double x, double y, double width, double height);

}  // namespace kf::read::svg
