// The boundary loops of a filled area (HATCH).
// Lengths in drawing units, angles in rad.
#include <algorithm>
#include <cmath>
#include <numbers>

#include <fmt/format.h>

#include "core/read/dxf_entities.h"

namespace kf::read {
namespace {

using curve::Affine2;
using curve::Curve;
using curve::Vec2;

constexpr double kDegree = std::numbers::pi / 180.0;
constexpr double kTurn = 2.0 * std::numbers::pi;

enum EdgeKind { kLineEdge = 1, kArcEdge = 2, kEllipseEdge = 3, kSplineEdge = 4 };

// One edge, or a whole polyline, while its groups arrive.
struct Edge {
  long long kind = 0;  // 0: polyline
  std::vector<Vec2> tens, elevens;
  std::vector<double> forties, weights;  // ratio or radius, or knots
  std::vector<double> bulges;            // one for each of `tens` in a polyline
  double from = 0.0, to = 360.0;         // degrees
  long long degree = 3;
  bool counterClockwise = true, closed = true, periodic = false;
};

// Angles of a clockwise edge are given as seen from behind: the arc runs from -from to -to.
// Source: the public DXF reference; the sense of clockwise edges from the behaviour of ezdxf (its reader).
struct Turn {
  double start, sweep;
};
Turn turnOf(const Edge& e) {
  double sweep = std::fmod(e.to - e.from, 360.0) * kDegree;
  if (sweep <= 0.0) sweep += kTurn;
  return e.counterClockwise ? Turn{e.from * kDegree, sweep} : Turn{-e.from * kDegree, -sweep};
}

// The parameter of the point that is seen from the centre under `angle` against the major axis.
double parameterOf(double angle, double ratio) {
  const double turns = std::round(angle / kTurn);
  const double rest = angle - turns * kTurn;
  return turns * kTurn + std::atan2(std::sin(rest) / ratio, std::cos(rest));
}

std::optional<Curve> ellipseEdge(const Edge& e) {
  const double ratio = e.forties.empty() ? 1.0 : e.forties.front();
  if (e.tens.empty() || e.elevens.empty() || !(ratio > 0.0) || !(norm(e.elevens[0]) > 0.0))
    return std::nullopt;
  const Turn seen = turnOf(e);
  const double start = parameterOf(seen.start, ratio);
  double sweep = std::copysign(kTurn, seen.sweep);
  if (std::abs(seen.sweep) < kTurn) sweep = parameterOf(seen.start + seen.sweep, ratio) - start;
  if (sweep == 0.0) return std::nullopt;
  return curve::EllipticArc{e.tens[0], e.elevens[0], ratio * curve::leftOf(e.elevens[0]), start, sweep};
}

std::optional<Curve> splineEdge(Edge& e) {
  if (e.tens.empty()) {
    e.elevens.erase(std::unique(e.elevens.begin(), e.elevens.end()), e.elevens.end());
    auto fitted = curve::interpolateCubic(e.elevens);
    return fitted ? std::optional<Curve>(std::move(*fitted)) : std::nullopt;
  }
  if (e.degree < 1 || e.degree > curve::kMaxDegree) return std::nullopt;
  const int degree = static_cast<int>(e.degree);
  const bool wrapped = e.periodic && e.forties.size() == e.tens.size() + 1;
  auto spline = wrapped ? curve::makePeriodicNurbs(degree, e.forties, e.tens, e.weights)
                        : curve::makeNurbs(degree, e.forties, e.tens, e.weights);
  return spline ? std::optional<Curve>(std::move(*spline)) : std::nullopt;
}

std::optional<Curve> edgeCurve(Edge& e) {
  switch (e.kind) {
    case kLineEdge:
      if (e.tens.empty() || e.elevens.empty() || e.tens[0] == e.elevens[0]) return std::nullopt;
      return curve::Line{e.tens[0], e.elevens[0]};
    case kArcEdge: {
      if (e.tens.empty() || e.forties.empty() || !(e.forties[0] > 0.0)) return std::nullopt;
      const Turn turn = turnOf(e);
      return curve::Arc{e.tens[0], e.forties[0], turn.start, turn.sweep};
    }
    case kEllipseEdge:
      return ellipseEdge(e);
    case kSplineEdge:
      return splineEdge(e);
    default:
      return std::nullopt;
  }
}

class HatchReader {
 public:
  HatchReader(Fields& fields, const Affine2& map) : f_(fields), map_(map) {}

  EntityContent run() {
    const auto& groups = f_.record().groups;
    auto at = std::find_if(groups.begin(), groups.end(), [](const Group& g) { return g.code == 91; });
    // Loops begin with group 92; group 75 (the style) comes after the last.
    for (; at != groups.end() && at->code != 75; ++at) take(*at);
    finishEdge();
    if (!content_.skipReason.empty()) content_.curves.clear();
    if (content_.curves.empty() && content_.skipReason.empty()) content_.skipReason = "it has no boundary";
    return std::move(content_);
  }

 private:
  void take(const Group& g) {
    if (g.code == 92) {
      finishEdge();
      polyline_ = (f_.wholeOf(g) & 2) != 0;
      open_ = polyline_;
      edge_ = {};
      return;
    }
    if (g.code == 330 || g.code == 97) {
      // 97 counts fit points inside a spline edge, source objects after the last edge; neither is needed.
      return;
    }
    if (g.code == 72 && !polyline_) {
      finishEdge();
      edge_ = {};
      edge_.kind = f_.wholeOf(g);
      open_ = true;
      return;
    }
    if (open_) takeInto(g);
  }

  void takeInto(const Group& g) {
    Edge& e = edge_;
    switch (g.code) {
      case 10:
        e.tens.push_back({f_.of(g), 0.0});
        e.bulges.push_back(0.0);
        break;
      case 20:
        if (!e.tens.empty()) e.tens.back().y = f_.of(g);
        break;
      case 11:
        e.elevens.push_back({f_.of(g), 0.0});
        break;
      case 21:
        if (!e.elevens.empty()) e.elevens.back().y = f_.of(g);
        break;
      case 40:
        e.forties.push_back(f_.of(g));
        break;
      case 42:
        if (polyline_ && !e.bulges.empty()) e.bulges.back() = f_.of(g);
        if (!polyline_) e.weights.push_back(f_.of(g));
        break;
      case 50:
        e.from = f_.of(g);
        break;
      case 51:
        e.to = f_.of(g);
        break;
      case 73:
        e.closed = e.counterClockwise = f_.wholeOf(g) != 0;
        break;
      case 74:
        e.periodic = f_.wholeOf(g) != 0;
        break;
      case 94:
        e.degree = f_.wholeOf(g);
        break;
      default:
        break;
    }
  }

  void finishEdge() {
    if (!open_) return;
    open_ = false;
    if (polyline_) {
      std::vector<BulgeVertex> vertices;
      for (std::size_t i = 0; i < edge_.tens.size(); ++i)
        vertices.push_back({edge_.tens[i], edge_.bulges[i]});
      for (const Curve& piece : polylineCurves(vertices, edge_.closed))
        content_.curves.push_back(piece.transformed(map_));
    } else if (const auto piece = edgeCurve(edge_)) {
      content_.curves.push_back(piece->transformed(map_));
    } else {
      content_.skipReason = "an edge of its boundary can't be used";
    }
  }

  Fields& f_;
  Affine2 map_;
  EntityContent content_;
  Edge edge_;
  bool polyline_ = false, open_ = false;
};

}  // namespace

EntityContent hatchBoundary(Fields& fields, const Affine2& map) {
  return HatchReader(fields, map).run();
}

}  // namespace kf::read
