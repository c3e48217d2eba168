// Exact conversion of edges; exceptions of the library end here.
// Lengths in mm, angles in rad.
#include "app/brep_reader/edges.h"

#include <BRep_Tool.hxx>
#include <GeomConvert.hxx>
#include <Geom_BSplineCurve.hxx>
#include <Geom_BezierCurve.hxx>
#include <Geom_Circle.hxx>
#include <Geom_Ellipse.hxx>
#include <Geom_Hyperbola.hxx>
#include <Geom_Line.hxx>
#include <Geom_Parabola.hxx>
#include <Geom_TrimmedCurve.hxx>
#include <Standard_Failure.hxx>
#include <TopExp.hxx>
#include <TopTools_IndexedMapOfShape.hxx>
#include <TopoDS.hxx>

#include <algorithm>
#include <cmath>
#include <limits>
#include <utility>

namespace kf::brep {
namespace {

Vec3 vec(const gp_XYZ& p) {
  return {p.X(), p.Y(), p.Z()};
}

Error refused(const char* what) {
  return {ErrorCode::unsupported, what};
}

SpaceConic conic(const gp_Ax2& axes, double major, double minor, double first, double last) {
  return {vec(axes.Location().XYZ()), major * vec(axes.XDirection().XYZ()),
          minor * vec(axes.YDirection().XYZ()), first, last - first};
}

// The stretch [first, last] of the spline. Only what a file rounds off is added at its ends.
SpaceSpline splineOf(const Handle(Geom_BSplineCurve) & source, double first, double last) {
  const Handle(Geom_BSplineCurve) spline = Handle(Geom_BSplineCurve)::DownCast(source->Copy());
  const double range = spline->LastParameter() - spline->FirstParameter();
  const bool whole = std::abs(first - spline->FirstParameter()) <= 1e-12 * range &&
                     std::abs(last - spline->LastParameter()) <= 1e-12 * range;
  if (spline->IsPeriodic() && !whole) {
    spline->Segment(first, last, 0.0);
  } else if (spline->IsPeriodic()) {
    spline->SetNotPeriodic();
  } else if (!whole) {
    spline->Segment(std::max(first, spline->FirstParameter()), std::min(last, spline->LastParameter()), 0.0);
  }
  SpaceSpline made;
  made.degree = spline->Degree();
  const TColStd_Array1OfReal& knots = spline->KnotSequence();
  made.knots.assign(knots.begin(), knots.end());
  for (int i = 1; i <= spline->NbPoles(); ++i) {
    made.poles.push_back(vec(spline->Pole(i).XYZ()));
    if (spline->IsRational()) made.weights.push_back(spline->Weight(i));
  }
  return made;
}

Result<SpaceCurve> convert(Handle(Geom_Curve) curve, double first, double last) {
  while (!curve.IsNull() && curve->IsKind(STANDARD_TYPE(Geom_TrimmedCurve)))
    curve = Handle(Geom_TrimmedCurve)::DownCast(curve)->BasisCurve();
  if (curve.IsNull()) return refused("an edge has no curve in space");
  const bool good = std::isfinite(first) && std::isfinite(last) && first < last && last - first < 1e100;
  if (!good) return Error{ErrorCode::invalidArgument, "an edge has no finite extent"};
  if (curve->IsKind(STANDARD_TYPE(Geom_Line)))
    return SpaceCurve(SpaceLine{vec(curve->Value(first).XYZ()), vec(curve->Value(last).XYZ())});
  if (const auto circle = Handle(Geom_Circle)::DownCast(curve); !circle.IsNull())
    return SpaceCurve(conic(circle->Position(), circle->Radius(), circle->Radius(), first, last));
  if (const auto ellipse = Handle(Geom_Ellipse)::DownCast(curve); !ellipse.IsNull())
    return SpaceCurve(
        conic(ellipse->Position(), ellipse->MajorRadius(), ellipse->MinorRadius(), first, last));
  if (const auto spline = Handle(Geom_BSplineCurve)::DownCast(curve); !spline.IsNull())
    return SpaceCurve(splineOf(spline, first, last));
  const bool exact = curve->IsKind(STANDARD_TYPE(Geom_BezierCurve)) ||
                     curve->IsKind(STANDARD_TYPE(Geom_Parabola)) ||
                     curve->IsKind(STANDARD_TYPE(Geom_Hyperbola));
  if (!exact) return refused("an edge lies on an offset curve, which no spline is equal to");
  const Handle(Geom_TrimmedCurve) piece = new Geom_TrimmedCurve(curve, first, last);
  const Handle(Geom_BSplineCurve) spline = GeomConvert::CurveToBSplineCurve(piece);
  return SpaceCurve(splineOf(spline, spline->FirstParameter(), spline->LastParameter()));
}

bool isFinite(Vec3 p) {
  return std::isfinite(p.x) && std::isfinite(p.y) && std::isfinite(p.z);
}

bool isFinite(const SpaceCurve& curve) {
  if (const auto* line = std::get_if<SpaceLine>(&curve)) return isFinite(line->a) && isFinite(line->b);
  if (const auto* conic = std::get_if<SpaceConic>(&curve))
    return isFinite(conic->centre) && isFinite(conic->u) && isFinite(conic->v);
  const auto& poles = std::get<SpaceSpline>(curve).poles;
  return std::all_of(poles.begin(), poles.end(), [](Vec3 p) { return isFinite(p); });
}

void reverse(SpaceCurve& curve) {
  if (auto* line = std::get_if<SpaceLine>(&curve)) {
    std::swap(line->a, line->b);
  } else if (auto* conic = std::get_if<SpaceConic>(&curve)) {
    conic->start += conic->sweep;
    conic->sweep = -conic->sweep;
  } else {
    auto& spline = std::get<SpaceSpline>(curve);
    const double sum = spline.knots.front() + spline.knots.back();
    std::reverse(spline.poles.begin(), spline.poles.end());
    std::reverse(spline.weights.begin(), spline.weights.end());
    std::reverse(spline.knots.begin(), spline.knots.end());
    for (double& knot : spline.knots) knot = sum - knot;
  }
}

}  // namespace

Result<SpaceCurve> spaceCurveOf(const TopoDS_Edge& edge) {
  try {
    double first = 0.0, last = 0.0;
    const Handle(Geom_Curve) curve = BRep_Tool::Curve(edge, first, last);
    auto made = convert(curve, first, last);
    if (!made) return made;
    if (!isFinite(*made)) return Error{ErrorCode::invalidArgument, "an edge has a value that is not finite"};
    if (edge.Orientation() == TopAbs_REVERSED) reverse(*made);
    return made;
  } catch (const Standard_Failure&) {
    return Error{ErrorCode::invalidArgument, "an edge can't be evaluated"};
  }
}

std::vector<TopoDS_Edge> edgesOf(const TopoDS_Shape& shape) {
  TopTools_IndexedMapOfShape map;
  TopExp::MapShapes(shape, TopAbs_EDGE, map);
  std::vector<TopoDS_Edge> edges;
  for (int i = 1; i <= map.Extent(); ++i) {
    const TopoDS_Edge& edge = TopoDS::Edge(map(i));
    if (!BRep_Tool::Degenerated(edge)) edges.push_back(edge);
  }
  return edges;
}

}  // namespace kf::brep
