// From the record of one DXF entity to curves.
// Lengths in drawing units, angles in rad.
#include "core/read/dxf_entities.h"

#include <algorithm>
#include <array>
#include <cmath>
#include <numbers>

#include <fmt/format.h>

namespace kf::read {
namespace {

using curve::Affine2;
using curve::Curve;
using curve::Vec2;

constexpr double kDegree = std::numbers::pi / 180.0;
constexpr double kTurn = 2.0 * std::numbers::pi;
constexpr long long kMostArrayCells = 100'000;

// Reads many groups and remembers the first failure.
class Fields {
 public:
  Fields(const Record& record, std::string_view name) : record_(record), name_(name) {}

  double real(int code, double fallback = 0.0) {
    auto value = number(record_, code, fallback, name_);
    if (value) return *value;
    keep(value.error());
    return fallback;
  }
  long long whole(int code, long long fallback = 0) {
    auto value = integer(record_, code, fallback, name_);
    if (value) return *value;
    keep(value.error());
    return fallback;
  }
  Vec2 point(int code) { return {real(code), real(code + 10)}; }
  bool has(int code) const { return record_.find(code) != nullptr; }
  double of(const Group& group) {
    auto value = numberOf(group, name_);
    if (value) return *value;
    keep(value.error());
    return 0.0;
  }
  const std::optional<Error>& failed() const { return failed_; }

 private:
  void keep(const Error& error) {
    if (!failed_) failed_ = error;
  }
  const Record& record_;
  std::string_view name_;
  std::optional<Error> failed_;
};

EntityContent skipped(std::string reason) {
  EntityContent c;
  c.skipReason = std::move(reason);
  return c;
}

EntityContent only(Curve curve) {
  EntityContent c;
  c.curves.push_back(std::move(curve));
  return c;
}

bool sameLevel(double a, double b, double scale) {
  return std::abs(a - b) <= 1e-9 * std::max(1.0, scale);
}

EntityContent lineOf(Fields& f) {
  const Vec2 a = f.point(10), b = f.point(11);
  if (!sameLevel(f.real(30), f.real(31), norm(b - a))) return skipped("it leaves the XY plane");
  return only(curve::Line{a, b});
}

EntityContent arcOf(Fields& f, const Affine2& map, bool whole) {
  const double radius = f.real(40);
  if (!(radius > 0.0)) return skipped("its radius is not positive");
  double start = 0.0, sweep = kTurn;
  if (!whole) {
    start = f.real(50) * kDegree;
    sweep = std::fmod(f.real(51) * kDegree - start, kTurn);
    if (sweep <= 0.0) sweep += kTurn;
  }
  return only(Curve(curve::Arc{f.point(10), radius, start, sweep}).transformed(map));
}

// Centre and major axis are in world coordinates; the minor axis is extrusion x major, times the ratio.
EntityContent ellipseOf(Fields& f) {
  const Vec2 major = f.point(11);
  const double ratio = f.real(40, 1.0), start = f.real(41), end = f.real(42, kTurn);
  if (!sameLevel(f.real(31), 0.0, norm(major))) return skipped("it leaves the XY plane");
  if (!(ratio > 0.0) || !(norm(major) > 0.0)) return skipped("an axis has no length");
  double sweep = end - start;
  if (sweep <= 0.0) sweep = kTurn + std::fmod(sweep, kTurn);
  if (sweep > kTurn) sweep = kTurn;
  const double side = f.real(230, 1.0) < 0.0 ? -ratio : ratio;
  return only(curve::EllipticArc{f.point(10), major, side * curve::leftOf(major), start, sweep});
}

struct SplineData {
  std::vector<double> knots, weights, heights;
  std::vector<Vec2> poles, fit;
  std::optional<Vec2> startTangent, endTangent;
};

SplineData splineData(const Record& record, Fields& f) {
  SplineData d;
  Vec2 tangent;
  for (const Group& g : record.groups) {
    switch (g.code) {
      case 40:
        d.knots.push_back(f.of(g));
        break;
      case 41:
        d.weights.push_back(f.of(g));
        break;
      case 10:
        d.poles.push_back({f.of(g), 0.0});
        break;
      case 20:
        if (!d.poles.empty()) d.poles.back().y = f.of(g);
        break;
      case 11:
        d.fit.push_back({f.of(g), 0.0});
        break;
      case 21:
        if (!d.fit.empty()) d.fit.back().y = f.of(g);
        break;
      case 30:
      case 31:
        d.heights.push_back(f.of(g));
        break;
      case 12:
      case 13:
        tangent.x = f.of(g);
        break;
      case 22:
        tangent.y = f.of(g);
        d.startTangent = tangent;
        break;
      case 23:
        tangent.y = f.of(g);
        d.endTangent = tangent;
        break;
      default:
        break;
    }
  }
  return d;
}

EntityContent splineThroughPoints(SplineData& d, bool closed) {
  d.fit.erase(std::unique(d.fit.begin(), d.fit.end()), d.fit.end());
  if (closed && d.fit.size() > 2 && !(d.fit.front() == d.fit.back())) d.fit.push_back(d.fit.front());
  const auto tangent = [](const std::optional<Vec2>& t) { return t && norm(*t) > 0.0 ? &*t : nullptr; };
  auto spline = curve::interpolateCubic(d.fit, tangent(d.startTangent), tangent(d.endTangent));
  return spline ? only(std::move(*spline)) : skipped(spline.error().message);
}

EntityContent splineOf(const Record& record, Fields& f) {
  SplineData d = splineData(record, f);
  const auto flags = f.whole(70), degree = f.whole(71, 3);
  if (!d.heights.empty()) {
    const auto [low, high] = std::minmax_element(d.heights.begin(), d.heights.end());
    if (!sameLevel(*low, *high, std::abs(*high))) return skipped("it leaves the XY plane");
  }
  if (d.poles.empty()) return splineThroughPoints(d, (flags & 1) != 0);
  if (degree < 1 || degree > curve::kMaxDegree) return skipped(fmt::format("its degree is {}", degree));
  if ((flags & 4) == 0) d.weights.clear();
  const bool wrapped = d.knots.size() == d.poles.size() + 1 && (flags & 2) != 0;
  auto spline = wrapped ? curve::makePeriodicNurbs(static_cast<int>(degree), std::move(d.knots),
                                                   std::move(d.poles), std::move(d.weights))
                        : curve::makeNurbs(static_cast<int>(degree), std::move(d.knots), std::move(d.poles),
                                           std::move(d.weights));
  if (!spline) return skipped(spline.error().message);
  return only(std::move(*spline));
}

EntityContent lwPolylineOf(const Record& record, Fields& f, const Affine2& map) {
  std::vector<BulgeVertex> vertices;
  for (const Group& g : record.groups) {
    if (g.code == 10) vertices.push_back({{f.of(g), 0.0}, 0.0});
    if (g.code == 20 && !vertices.empty()) vertices.back().point.y = f.of(g);
    if (g.code == 42 && !vertices.empty()) vertices.back().bulge = f.of(g);
  }
  EntityContent c;
  for (const Curve& piece : polylineCurves(vertices, (f.whole(70) & 1) != 0))
    c.curves.push_back(piece.transformed(map));
  if (c.curves.empty()) return skipped("it has fewer than two different vertices");
  return c;
}

EntityContent insertOf(const Record& record, Fields& f, const Affine2& map) {
  InsertRef ref;
  const Group* block = record.find(2);
  if (block == nullptr) return skipped("it names no block");
  ref.block = std::string(block->value);
  const double sx = f.real(41, 1.0), sy = f.real(42, 1.0);
  if (sx == 0.0 || sy == 0.0) return skipped("a scale of its is zero");
  const long long columns = f.whole(70, 1), rows = f.whole(71, 1);
  if (columns < 1 || rows < 1 || columns > kMostArrayCells || rows > kMostArrayCells ||
      columns * rows > kMostArrayCells) {
    return skipped(fmt::format("its array of {} by {} is out of range", columns, rows));
  }
  const double dx = f.real(44), dy = f.real(45);
  for (long long r = 0; r < rows; ++r) {
    for (long long c = 0; c < columns; ++c)
      ref.cells.push_back({static_cast<double>(c) * dx, static_cast<double>(r) * dy});
  }
  ref.map = Affine2::scaling(sx, sy);
  ref.outer = map * Affine2::translation(f.point(10)) * Affine2::rotation(f.real(50) * kDegree);
  EntityContent content;
  content.insert = std::move(ref);
  return content;
}

// Kinds that mark, measure or show, but draw nothing that a tool could follow.
std::string_view whyIgnored(std::string_view type) {
  constexpr std::array<std::pair<std::string_view, std::string_view>, 23> kinds = {{
      {"TEXT", "text has no contour"},
      {"MTEXT", "text has no contour"},
      {"ATTRIB", "text has no contour"},
      {"ATTDEF", "text has no contour"},
      {"RTEXT", "text has no contour"},
      {"ARCALIGNEDTEXT", "text has no contour"},
      {"DIMENSION", "a dimension is a note"},
      {"ARC_DIMENSION", "a dimension is a note"},
      {"LARGE_RADIAL_DIMENSION", "a dimension is a note"},
      {"LEADER", "a leader is a note"},
      {"MULTILEADER", "a leader is a note"},
      {"MLEADER", "a leader is a note"},
      {"TOLERANCE", "a tolerance frame is a note"},
      {"ACAD_TABLE", "a table is a note"},
      {"POINT", "a point has no length"},
      {"VIEWPORT", "a viewport is no geometry"},
      {"IMAGE", "an image has no contour"},
      {"WIPEOUT", "a mask has no contour"},
      {"OLEFRAME", "an embedded object has no contour"},
      {"OLE2FRAME", "an embedded object has no contour"},
      {"HATCH", "a filled area is no contour"},
      {"XLINE", "a construction line has no end"},
      {"RAY", "a construction line has no end"},
  }};
  for (const auto& [kind, reason] : kinds) {
    if (kind == type) return reason;
  }
  return {};
}

}  // namespace

// The chord a-b is seen from the centre under 4 atan(b): the centre lies on its middle normal, (1 - b^2) / (4
// b) chords to the left of its middle.
std::vector<Curve> polylineCurves(const std::vector<BulgeVertex>& vertices, bool closed) {
  std::vector<Curve> curves;
  const std::size_t n = vertices.size();
  for (std::size_t i = 0; i + (closed ? 0 : 1) < n; ++i) {
    const Vec2 a = vertices[i].point, b = vertices[(i + 1) % n].point;
    const double bulge = vertices[i].bulge;
    const Vec2 chord = b - a;
    if (a == b) continue;
    // A bulge this small bends by less than rounding of the coordinates.
    if (std::abs(bulge) < 1e-12) {
      curves.emplace_back(curve::Line{a, b});
      continue;
    }
    const Vec2 centre = 0.5 * (a + b) + ((1.0 - bulge * bulge) / (4.0 * bulge)) * curve::leftOf(chord);
    const double radius = 0.25 * norm(chord) * (1.0 + bulge * bulge) / std::abs(bulge);
    curves.emplace_back(
        curve::Arc{centre, radius, std::atan2(a.y - centre.y, a.x - centre.x), 4.0 * std::atan(bulge)});
  }
  return curves;
}

Result<std::optional<Affine2>> objectMap(const Record& record, std::string_view name) {
  Fields f(record, name);
  const double nx = f.real(210), ny = f.real(220), nz = f.real(230, 1.0);
  if (f.failed()) return *f.failed();
  if (std::abs(nx) + std::abs(ny) > 1e-9 * std::abs(nz)) return std::optional<Affine2>();
  return std::optional<Affine2>(nz < 0.0 ? Affine2::scaling(-1.0, 1.0) : Affine2{});
}

Result<EntityContent> interpret(const Record& record, std::string_view name) {
  EntityContent content;
  if (const std::string_view reason = whyIgnored(record.type); !reason.empty()) {
    content.ignoreReason = reason;
    return content;
  }
  Fields f(record, name);
  const auto map = objectMap(record, name);
  if (!map) return map.error();
  if (!*map) {
    content = skipped("it is not parallel to the XY plane");
  } else if (record.type == "LINE") {
    content = lineOf(f);
  } else if (record.type == "ARC" || record.type == "CIRCLE") {
    content = arcOf(f, **map, record.type == "CIRCLE");
  } else if (record.type == "ELLIPSE") {
    content = ellipseOf(f);
  } else if (record.type == "SPLINE") {
    content = splineOf(record, f);
  } else if (record.type == "LWPOLYLINE") {
    content = lwPolylineOf(record, f, **map);
  } else if (record.type == "INSERT") {
    content = insertOf(record, f, **map);
  } else {
    content = skipped("this kind of entity is not read");
  }
  if (f.failed()) return *f.failed();
  return content;
}

}  // namespace kf::read
