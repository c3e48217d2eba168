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

EntityContent only(Curve curve) {
  EntityContent c;
  c.curves.push_back(std::move(curve));
  return c;
}

// In world coordinates, whatever its extrusion says.
EntityContent lineOf(Fields& f) {
  const Vec2 a = f.point(10), b = f.point(11);
  if (!sameLevel(f.real(30), f.real(31), norm(b - a))) return skippedFor("it leaves the XY plane");
  return only(curve::Line{a, b});
}

EntityContent arcOf(Fields& f, const Affine2& map, bool whole) {
  const double radius = f.real(40);
  if (!(radius > 0.0)) return skippedFor("its radius is not positive");
  double start = 0.0, sweep = kTurn;
  if (!whole) {
    start = f.real(50) * kDegree;
    sweep = std::fmod(f.real(51) - f.real(50), 360.0) * kDegree;
    if (sweep <= 0.0) sweep += kTurn;
  }
  return only(Curve(curve::Arc{f.point(10), radius, start, sweep}).transformed(map));
}

// Centre and major axis are in world coordinates; the minor axis is extrusion x major, times the ratio.
EntityContent ellipseOf(Fields& f) {
  const Vec2 major = f.point(11);
  const double ratio = f.real(40, 1.0), start = f.real(41), end = f.real(42, kTurn);
  if (!sameLevel(f.real(31), 0.0, norm(major))) return skippedFor("it leaves the XY plane");
  if (!(ratio > 0.0) || !(norm(major) > 0.0)) return skippedFor("an axis has no length");
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

// Tangents are directions: with chord lengths as parameters the speed along the curve is about 1.
EntityContent splineThroughPoints(SplineData& d, bool closed) {
  d.fit.erase(std::unique(d.fit.begin(), d.fit.end()), d.fit.end());
  if (closed && d.fit.size() > 2 && !(d.fit.front() == d.fit.back())) d.fit.push_back(d.fit.front());
  const auto direction = [](std::optional<Vec2>& t) -> const Vec2* {
    if (!t || !(norm(*t) > 0.0)) return nullptr;
    *t = curve::unit(*t);
    return &*t;
  };
  auto spline = curve::interpolateCubic(d.fit, direction(d.startTangent), direction(d.endTangent));
  return spline ? only(std::move(*spline)) : skippedFor(spline.error().message);
}

EntityContent splineOf(const Record& record, Fields& f) {
  SplineData d = splineData(record, f);
  const auto flags = f.whole(70), degree = f.whole(71, 3);
  if (!d.heights.empty()) {
    const auto [low, high] = std::minmax_element(d.heights.begin(), d.heights.end());
    if (!sameLevel(*low, *high, std::abs(*high))) return skippedFor("it leaves the XY plane");
  }
  if (d.poles.empty()) return splineThroughPoints(d, (flags & 1) != 0);
  if (degree < 1 || degree > curve::kMaxDegree) return skippedFor(fmt::format("its degree is {}", degree));
  const bool wrapped = d.knots.size() == d.poles.size() + 1 && (flags & 2) != 0;
  auto spline = wrapped ? curve::makePeriodicNurbs(static_cast<int>(degree), std::move(d.knots),
                                                   std::move(d.poles), std::move(d.weights))
                        : curve::makeNurbs(static_cast<int>(degree), std::move(d.knots), std::move(d.poles),
                                           std::move(d.weights));
  if (!spline) return skippedFor(spline.error().message);
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
  c.curves = polylineCurves(vertices, (f.whole(70) & 1) != 0);
  if (map.xx != 1.0) {
    for (Curve& piece : c.curves) piece = piece.transformed(map);
  }
  if (c.curves.empty()) return skippedFor("it has fewer than two different vertices");
  return c;
}

EntityContent insertOf(Fields& f, const Affine2& map) {
  const Group* block = f.record().find(2);
  if (block == nullptr) return skippedFor("it names no block");
  auto ref = std::make_unique<InsertRef>();
  ref->block = std::string(block->value);
  const double sx = f.real(41, 1.0), sy = f.real(42, 1.0);
  if (sx == 0.0 || sy == 0.0) return skippedFor("a scale of its is zero");
  ref->columns = f.whole(70, 1);
  ref->rows = f.whole(71, 1);
  // Some writers leave 0 where 1 is meant.
  if (ref->columns == 0) ref->columns = 1;
  if (ref->rows == 0) ref->rows = 1;
  if (ref->columns < 0 || ref->rows < 0 || ref->columns > kMostArrayCells || ref->rows > kMostArrayCells ||
      ref->columns * ref->rows > kMostArrayCells) {
    return skippedFor(fmt::format("its array has less than one or more than {} members", kMostArrayCells));
  }
  ref->step = {f.real(44), f.real(45)};
  ref->map = Affine2::scaling(sx, sy);
  ref->outer = map * Affine2::translation(f.point(10)) * Affine2::rotation(f.real(50) * kDegree);
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

// The chord a-b is seen from the centre under 4 atan(b): the centre lies on its middle normal,
// (1 - b^2) / (4 b) chords to the left of its middle. The radius is (1 + b^2) / (4 b) chords, so the centre's
// rounding reaches the curve as about 1e-16 / (4 b) chords; below b = 1e-4 the quadratic form is better: its
// middle pole is where the end tangents meet, (chord / 2) tan(2 atan b) to the right of the chord's middle,
// and its weight is cos(2 atan b).
Curve bulgeCurve(Vec2 a, Vec2 b, double bulge) {
  const Vec2 chord = b - a, middle = 0.5 * (a + b);
  const double square = bulge * bulge;
  if (std::abs(bulge) < 1e-4) {
    const double weight = (1.0 - square) / (1.0 + square);
    const Vec2 apex = middle - (bulge / (1.0 - square)) * curve::leftOf(chord);
    return curve::Nurbs{2, {0.0, 0.0, 0.0, 1.0, 1.0, 1.0}, {a, apex, b}, {1.0, weight, 1.0}};
  }
  const Vec2 centre = middle + ((1.0 - square) / (4.0 * bulge)) * curve::leftOf(chord);
  const double radius = 0.25 * norm(chord) * (1.0 + square) / std::abs(bulge);
  return curve::Arc{centre, radius, std::atan2(a.y - centre.y, a.x - centre.x), 4.0 * std::atan(bulge)};
}

}  // namespace

bool sameLevel(double a, double b, double size) {
  return std::abs(a - b) <= 1e-9 * std::max(1.0, size);
}

std::vector<Curve> polylineCurves(const std::vector<BulgeVertex>& vertices, bool closed) {
  std::vector<Curve> curves;
  const std::size_t n = vertices.size();
  curves.reserve(n);
  for (std::size_t i = 0; i + (closed ? 0 : 1) < n; ++i) {
    const Vec2 a = vertices[i].point, b = vertices[(i + 1) % n].point;
    const double bulge = vertices[i].bulge;
    if (a == b) continue;
    // A bulge this small bends by less than rounding of the coordinates.
    if (std::abs(bulge) < 1e-14) {
      curves.emplace_back(curve::Line{a, b});
    } else {
      curves.push_back(bulgeCurve(a, b, bulge));
    }
  }
  return curves;
}

std::optional<Affine2> objectMap(Fields& f) {
  const double nx = f.real(210), ny = f.real(220), nz = f.real(230, 1.0);
  if (std::abs(nx) + std::abs(ny) > 1e-9 * std::abs(nz)) return std::nullopt;
  return nz < 0.0 ? Affine2::scaling(-1.0, 1.0) : Affine2{};
}

Result<EntityContent> interpret(const Record& record, bool hatchBoundaries, std::string_view name) {
  EntityContent content;
  Fields f(record, name);
  const std::string_view type = record.type;
  if (const std::string_view reason = whyIgnored(type);
      !reason.empty() && !(hatchBoundaries && type == "HATCH")) {
    content.ignoreReason = reason;
    return content;
  }
  // Lines and splines are in world coordinates; the others lie in the plane of their extrusion.
  if (type == "LINE") {
    content = lineOf(f);
  } else if (type == "SPLINE") {
    content = splineOf(record, f);
  } else if (const auto map = objectMap(f); !map) {
    content = skippedFor("it is not parallel to the XY plane");
  } else if (type == "ARC" || type == "CIRCLE") {
    content = arcOf(f, *map, type == "CIRCLE");
  } else if (type == "ELLIPSE") {
    content = ellipseOf(f);
  } else if (type == "LWPOLYLINE") {
    content = lwPolylineOf(record, f, *map);
  } else if (type == "INSERT") {
    content = insertOf(f, *map);
  } else if (type == "HATCH") {
    content = hatchBoundary(f, *map);
  } else {
    content = skippedFor("this kind of entity is not read");
  }
  if (f.failed()) return *f.failed();
  return content;
}

}  // namespace kf::read
