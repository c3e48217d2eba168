// Writing and distrustful reading of the helper's answer.
// Lengths in mm, angles in rad.
#include "core/read/brep_wire.h"

#include <algorithm>
#include <bit>
#include <cmath>
#include <cstdint>
#include <cstring>
#include <numbers>
#include <utility>

#include <fmt/format.h>

namespace kf::read {
namespace {

using curve::Curve;
using curve::Vec2;

constexpr std::string_view kMagic = "KFBREP01";
constexpr std::size_t kLongestText = 1U << 16U;

class Writer {
 public:
  void byte(char c) { bytes_ += c; }
  void count(std::uint64_t n) {
    for (int i = 0; i < 8; ++i) bytes_ += static_cast<char>((n >> (8 * i)) & 0xFFU);
  }
  void real(double value) { count(std::bit_cast<std::uint64_t>(value)); }
  void point(Vec2 p) {
    real(p.x);
    real(p.y);
  }
  void text(std::string_view t) {
    t = t.substr(0, kLongestText);
    count(t.size());
    bytes_ += t;
  }
  std::string take() { return std::move(bytes_); }

 private:
  std::string bytes_;
};

// Reads past the end give zeros and set `failed`.
class Cursor {
 public:
  explicit Cursor(std::string_view bytes) : rest_(bytes) {}
  bool failed() const { return failed_; }
  bool atEnd() const { return rest_.empty(); }

  char byte() {
    if (!has(1)) return '\0';
    const char c = rest_.front();
    rest_.remove_prefix(1);
    return c;
  }
  std::uint64_t count() {
    if (!has(8)) return 0;
    std::uint64_t n = 0;
    for (std::size_t i = 0; i < 8; ++i) n |= std::uint64_t{static_cast<unsigned char>(rest_[i])} << (8U * i);
    rest_.remove_prefix(8);
    return n;
  }
  // A number of items of `size` bytes that must still be there.
  std::size_t countOf(std::size_t size) {
    const std::uint64_t n = count();
    if (n > rest_.size() / size) {
      failed_ = true;
      return 0;
    }
    return static_cast<std::size_t>(n);
  }
  double real() {
    const auto value = std::bit_cast<double>(count());
    if (!std::isfinite(value)) failed_ = true;
    return value;
  }
  Vec2 point() {
    const double x = real(), y = real();
    return {x, y};
  }
  std::string text() {
    const std::size_t n = countOf(1);
    if (n > kLongestText) failed_ = true;
    if (failed_) return {};
    std::string t(rest_.substr(0, n));
    rest_.remove_prefix(n);
    return t;
  }

 private:
  bool has(std::size_t n) {
    if (rest_.size() < n) failed_ = true;
    return !failed_;
  }
  std::string_view rest_;
  bool failed_ = false;
};

void write(Writer& out, const Curve& curve) {
  if (const curve::Line* line = curve.asLine()) {
    out.byte('l');
    out.point(line->a);
    out.point(line->b);
  } else if (const curve::Arc* arc = curve.asArc()) {
    out.byte('a');
    out.point(arc->centre);
    for (double value : {arc->radius, arc->start, arc->sweep}) out.real(value);
  } else if (const curve::EllipticArc* e = curve.asEllipticArc()) {
    out.byte('e');
    for (Vec2 p : {e->centre, e->u, e->v}) out.point(p);
    out.real(e->start);
    out.real(e->sweep);
  } else {
    const curve::Nurbs& spline = *curve.asNurbs();
    out.byte('s');
    out.count(static_cast<std::uint64_t>(spline.degree));
    out.count(spline.knots.size());
    for (double knot : spline.knots) out.real(knot);
    out.count(spline.poles.size());
    for (Vec2 pole : spline.poles) out.point(pole);
    out.count(spline.weights.size());
    for (double weight : spline.weights) out.real(weight);
  }
}

Error damaged() {
  return {ErrorCode::cannotRead, "the helper's answer is damaged; try again, and export the drawing anew"};
}

Result<Curve> readSpline(Cursor& in) {
  const std::uint64_t degree = in.count();
  std::vector<double> knots(in.countOf(8));
  for (double& knot : knots) knot = in.real();
  std::vector<Vec2> poles(in.countOf(16));
  for (Vec2& pole : poles) pole = in.point();
  std::vector<double> weights(in.countOf(8));
  for (double& weight : weights) weight = in.real();
  if (in.failed() || degree < 1) return damaged();
  if (degree > static_cast<std::uint64_t>(curve::kMaxDegree)) {
    return Error{ErrorCode::unsupported,
                 fmt::format("holds a spline of degree {}, more than {}; export it with a lower degree",
                             degree, curve::kMaxDegree)};
  }
  auto spline =
      curve::makeNurbs(static_cast<int>(degree), std::move(knots), std::move(poles), std::move(weights));
  if (!spline) return Error{ErrorCode::cannotRead, spline.error().message + "; export the drawing anew"};
  return Curve(*std::move(spline));
}

Result<Curve> readCurve(Cursor& in) {
  const auto turns = [](double sweep) { return sweep != 0.0 && std::abs(sweep) <= 2.0 * std::numbers::pi; };
  switch (in.byte()) {
    case 'l': {
      const Vec2 a = in.point(), b = in.point();
      return Curve(curve::Line{a, b});
    }
    case 'a': {
      curve::Arc arc;
      arc.centre = in.point();
      arc.radius = in.real();
      arc.start = in.real();
      arc.sweep = in.real();
      if (in.failed() || !(arc.radius > 0.0) || !turns(arc.sweep)) return damaged();
      return Curve(arc);
    }
    case 'e': {
      curve::EllipticArc e;
      e.centre = in.point();
      e.u = in.point();
      e.v = in.point();
      e.start = in.real();
      e.sweep = in.real();
      if (in.failed() || cross(e.u, e.v) == 0.0 || !turns(e.sweep)) return damaged();
      return Curve(e);
    }
    case 's':
      return readSpline(in);
    default:
      return damaged();
  }
}

Skipped readSkipped(Cursor& in) {
  Skipped row;
  row.kind = in.text();
  row.reason = in.text();
  row.count = static_cast<std::size_t>(in.count());
  row.firstPlace = in.text();
  return row;
}

void write(Writer& out, char tag, const Skipped& row) {
  out.byte(tag);
  out.text(row.kind);
  out.text(row.reason);
  out.count(row.count);
  out.text(row.firstPlace);
}

}  // namespace

std::string encodeDrawing(const Result<Drawing>& drawing) {
  Writer out;
  for (char c : kMagic) out.byte(c);
  std::uint64_t records = 0;
  const auto tagged = [&](char tag, std::string_view text) {
    out.byte(tag);
    out.text(text);
    ++records;
  };
  if (!drawing) {
    tagged(drawing.error().code == ErrorCode::unsupported ? 'U' : 'E', drawing.error().message);
  } else {
    tagged('F', drawing->format);
    for (const std::string& warning : drawing->warnings) tagged('W', warning);
    for (const std::string& layer : drawing->layers) tagged('L', layer);
    for (const Skipped& row : drawing->skipped) write(out, 'S', row);
    for (const Skipped& row : drawing->ignored) write(out, 'I', row);
    records += drawing->skipped.size() + drawing->ignored.size() + drawing->curves.size();
    for (const contour::LooseCurve& loose : drawing->curves) {
      out.byte('C');
      out.text(loose.layer);
      out.text(loose.source);
      write(out, loose.curve);
    }
  }
  out.byte('Z');
  out.count(records);
  return out.take();
}

Result<Drawing> decodeDrawing(std::string_view bytes, std::size_t maxCurves) {
  if (bytes.substr(0, kMagic.size()) != kMagic) return damaged();
  Cursor in(bytes.substr(kMagic.size()));
  Drawing drawing;
  drawing.unitName = "mm";
  drawing.millimetresPerUnit = 1.0;
  std::optional<Error> carried;
  for (std::uint64_t records = 0;; ++records) {
    if (in.failed()) return damaged();
    const char tag = in.byte();
    if (tag == 'Z') {
      if (in.count() != records || in.failed() || !in.atEnd()) return damaged();
      break;
    }
    switch (tag) {
      case 'U':
        carried = Error{ErrorCode::unsupported, in.text()};
        break;
      case 'E':
        carried = Error{ErrorCode::cannotRead, in.text()};
        break;
      case 'F':
        drawing.format = in.text();
        break;
      case 'W':
        drawing.warnings.push_back(in.text());
        break;
      case 'L':
        drawing.layers.push_back(in.text());
        break;
      case 'S':
        drawing.skipped.push_back(readSkipped(in));
        break;
      case 'I':
        drawing.ignored.push_back(readSkipped(in));
        break;
      case 'C': {
        std::string layer = in.text(), source = in.text();
        auto curve = readCurve(in);
        if (!curve) return curve.error();
        if (drawing.curves.size() == maxCurves) {
          return Error{ErrorCode::unsupported,
                       fmt::format("holds more than {} curves; split the drawing", maxCurves)};
        }
        drawing.curves.push_back({*std::move(curve), std::move(layer), std::move(source)});
        break;
      }
      default:
        return damaged();
    }
  }
  if (carried) return *carried;
  return drawing;
}

}  // namespace kf::read
