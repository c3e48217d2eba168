// Numbers, lengths, transforms and boxes of SVG attributes.
// Lengths in CSS pixels, angles in rad.
#include "core/read/svg_scan.h"

#include <algorithm>
#include <charconv>
#include <cmath>
#include <numbers>
#include <utility>

namespace kf::read::svg {
namespace {

using curve::Affine2;

bool isBlank(char c) {
  return c == ' ' || c == '\t' || c == '\n' || c == '\r' || c == '\f';
}
bool isDigit(char c) {
  return c >= '0' && c <= '9';
}
bool isLetter(char c) {
  return (c >= 'a' && c <= 'z') || (c >= 'A' && c <= 'Z');
}

// Exact at multiples of a quarter turn, so that turned drawings stay clean.
Affine2 rotationByDegrees(double degrees) {
  const double quarter = degrees / 90.0;
  if (quarter == std::floor(quarter) && std::abs(quarter) < 1e15) {
    const auto turns = static_cast<long long>(quarter) & 3LL;
    constexpr std::array<double, 4> kCos = {1.0, 0.0, -1.0, 0.0}, kSin = {0.0, 1.0, 0.0, -1.0};
    const double c = kCos[static_cast<std::size_t>(turns)], s = kSin[static_cast<std::size_t>(turns)];
    return {c, -s, s, c, 0.0, 0.0};
  }
  return Affine2::rotation(degrees * std::numbers::pi / 180.0);
}

// One argument of a transform function; an angle unit is turned into degrees, px is dropped.
std::optional<double> argument(Scanner& scan) {
  const auto value = scan.number();
  if (!value) return std::nullopt;
  const std::string_view unit = scan.word();
  if (unit.empty() || unit == "px" || unit == "deg") return value;
  if (unit == "rad") return *value * 180.0 / std::numbers::pi;
  if (unit == "grad") return *value * 0.9;
  if (unit == "turn") return *value * 360.0;
  return std::nullopt;
}

double tangentOfDegrees(double degrees) {
  return std::tan(degrees * std::numbers::pi / 180.0);
}

std::optional<Affine2> transformFunction(std::string_view name, const std::vector<double>& a) {
  const std::size_t n = a.size();
  if (name == "matrix" && n == 6) return Affine2{a[0], a[2], a[1], a[3], a[4], a[5]};
  if (name == "translate" && (n == 1 || n == 2)) return Affine2::translation({a[0], n == 2 ? a[1] : 0.0});
  if (name == "translateX" && n == 1) return Affine2::translation({a[0], 0.0});
  if (name == "translateY" && n == 1) return Affine2::translation({0.0, a[0]});
  if (name == "scale" && (n == 1 || n == 2)) return Affine2::scaling(a[0], n == 2 ? a[1] : a[0]);
  if (name == "scaleX" && n == 1) return Affine2::scaling(a[0], 1.0);
  if (name == "scaleY" && n == 1) return Affine2::scaling(1.0, a[0]);
  if (name == "rotate" && n == 1) return rotationByDegrees(a[0]);
  if (name == "rotate" && n == 3) {
    return Affine2::translation({a[1], a[2]}) * rotationByDegrees(a[0]) *
           Affine2::translation({-a[1], -a[2]});
  }
  if (name == "skewX" && n == 1) return Affine2{1.0, tangentOfDegrees(a[0]), 0.0, 1.0, 0.0, 0.0};
  if (name == "skewY" && n == 1) return Affine2{1.0, 0.0, tangentOfDegrees(a[0]), 1.0, 0.0, 0.0};
  return std::nullopt;
}

bool isFinite(const Affine2& m) {
  return std::isfinite(m.xx) && std::isfinite(m.xy) && std::isfinite(m.yx) && std::isfinite(m.yy) &&
         std::isfinite(m.dx) && std::isfinite(m.dy);
}

std::optional<double> alignment(std::string_view part) {
  if (part == "Min") return 0.0;
  if (part == "Mid") return 0.5;
  if (part == "Max") return 1.0;
  return std::nullopt;
}

}  // namespace

void Scanner::skipBlanks() {
  while (!atEnd() && isBlank(text_[at_])) ++at_;
}

bool Scanner::skipSeparator() {
  skipBlanks();
  const bool comma = take(',');
  if (comma) skipBlanks();
  return comma;
}

bool Scanner::take(char c) {
  if (atEnd() || text_[at_] != c) return false;
  ++at_;
  return true;
}

std::string_view Scanner::word() {
  const std::size_t from = at_;
  while (!atEnd() && isLetter(text_[at_])) ++at_;
  return text_.substr(from, at_ - from);
}

std::optional<double> Scanner::number() {
  std::size_t from = at_;
  const bool plus = from < text_.size() && text_[from] == '+';
  if (plus) ++from;
  // from_chars also takes "inf" and "nan": a digit must come first, or a point and a digit.
  std::size_t first = from;
  if (!plus && first < text_.size() && text_[first] == '-') ++first;
  const bool digit = first < text_.size() && isDigit(text_[first]);
  const bool point = first + 1 < text_.size() && text_[first] == '.' && isDigit(text_[first + 1]);
  if (!digit && !point) return std::nullopt;
  double value = 0.0;
  const char* const begin = text_.data() + from;
  const auto [end, failure] = std::from_chars(begin, text_.data() + text_.size(), value);
  if (failure == std::errc::result_out_of_range) {
    const std::string_view digits(begin, static_cast<std::size_t>(end - begin));
    if (digits.find("e-") == std::string_view::npos && digits.find("E-") == std::string_view::npos)
      return std::nullopt;
    value = 0.0;  // too small to tell from zero
  } else if (failure != std::errc()) {
    return std::nullopt;
  }
  at_ = static_cast<std::size_t>(end - text_.data());
  return value;
}

std::optional<bool> Scanner::flag() {
  if (take('0')) return false;
  if (take('1')) return true;
  return std::nullopt;
}

std::string_view stripped(std::string_view text) {
  while (!text.empty() && isBlank(text.front())) text.remove_prefix(1);
  while (!text.empty() && isBlank(text.back())) text.remove_suffix(1);
  return text;
}

std::optional<std::vector<double>> numberList(std::string_view text) {
  Scanner scan(stripped(text));
  std::vector<double> values;
  while (!scan.atEnd()) {
    const bool comma = !values.empty() && scan.skipSeparator();
    const auto value = scan.number();
    if (!value) return std::nullopt;
    if (comma && scan.atEnd() && values.empty()) return std::nullopt;
    values.push_back(*value);
  }
  return values;
}

std::optional<Length> parseLength(std::string_view text) {
  Scanner scan(stripped(text));
  const auto value = scan.number();
  if (!value) return std::nullopt;
  if (scan.take('%')) return scan.atEnd() ? std::optional(Length{*value, LengthUnit::percent}) : std::nullopt;
  const std::string_view unit = scan.word();
  if (!scan.atEnd()) return std::nullopt;
  constexpr std::array<std::pair<std::string_view, LengthUnit>, 9> kUnits = {{{"", LengthUnit::px},
                                                                              {"px", LengthUnit::px},
                                                                              {"mm", LengthUnit::mm},
                                                                              {"cm", LengthUnit::cm},
                                                                              {"in", LengthUnit::in},
                                                                              {"pt", LengthUnit::pt},
                                                                              {"pc", LengthUnit::pc},
                                                                              {"Q", LengthUnit::q},
                                                                              {"q", LengthUnit::q}}};
  for (const auto& [name, one] : kUnits) {
    if (unit == name) return Length{*value, one};
  }
  return std::nullopt;
}

double pixelsPer(LengthUnit unit) {
  switch (unit) {
    case LengthUnit::px:
      return 1.0;
    case LengthUnit::in:
      return 96.0;
    case LengthUnit::mm:
      return 96.0 / 25.4;
    case LengthUnit::cm:
      return 96.0 / 2.54;
    case LengthUnit::q:
      return 96.0 / 101.6;
    case LengthUnit::pt:
      return 96.0 / 72.0;
    case LengthUnit::pc:
      return 16.0;
    case LengthUnit::percent:
      break;
  }
  return 1.0;
}

std::optional<Affine2> parseTransform(std::string_view text) {
  Affine2 all;
  Scanner scan(stripped(text));
  if (scan.rest() == "none") return all;
  while (!scan.atEnd()) {
    const std::string_view name = scan.word();
    scan.skipBlanks();
    if (!scan.take('(')) return std::nullopt;
    std::vector<double> arguments;
    for (;;) {
      scan.skipBlanks();
      if (scan.take(')')) break;
      if (!arguments.empty()) scan.skipSeparator();
      const auto value = argument(scan);
      if (!value || arguments.size() == 6) return std::nullopt;
      arguments.push_back(*value);
    }
    const auto one = transformFunction(name, arguments);
    if (!one) return std::nullopt;
    all = all * *one;
    scan.skipSeparator();
  }
  if (!isFinite(all)) return std::nullopt;
  return all;
}

std::optional<ViewBox> parseViewBox(std::string_view text) {
  const auto values = numberList(text);
  if (!values || values->size() != 4) return std::nullopt;
  return ViewBox{(*values)[0], (*values)[1], (*values)[2], (*values)[3]};
}

std::optional<Fit> parseFit(std::string_view text) {
  Fit fit;
  Scanner scan(stripped(text));
  if (scan.atEnd()) return fit;
  std::string_view align = scan.word();
  if (align == "defer") {  // of SVG 1.1, for images only
    scan.skipBlanks();
    align = scan.word();
  }
  if (align == "none") {
    fit.uniform = false;
  } else {
    if (align.size() != 8 || align[0] != 'x' || align[4] != 'Y') return std::nullopt;
    const auto x = alignment(align.substr(1, 3)), y = alignment(align.substr(5, 3));
    if (!x || !y) return std::nullopt;
    fit.alignX = *x;
    fit.alignY = *y;
  }
  scan.skipBlanks();
  const std::string_view how = scan.word();
  if (!scan.atEnd() || (how != "" && how != "meet" && how != "slice")) return std::nullopt;
  fit.slice = how == "slice";
  return fit;
}

Affine2 fitMap(const ViewBox& box, const Fit& fit, double x, double y, double width, double height) {
  double fx = width / box.width, fy = height / box.height;
  if (fit.uniform) fx = fy = fit.slice ? std::max(fx, fy) : std::min(fx, fy);
  Affine2 map = Affine2::scaling(fx, fy);
  map.dx = x - box.x * fx;
  map.dy = y - box.y * fy;
  if (fit.uniform) {
    map.dx += fit.alignX * (width - box.width * fx);
    map.dy += fit.alignY * (height - box.height * fy);
  }
  return map;
}

}  // namespace kf::read::svg
