// Building edges and writing STEP and IGES.
// Lengths in mm.
#include "tests/support/brep_writing.h"

#include <APIHeaderSection_MakeHeader.hxx>
#include <BRepBuilderAPI_MakeEdge.hxx>
#include <BRep_Builder.hxx>
#include <Geom_BSplineCurve.hxx>
#include <Geom_Circle.hxx>
#include <Geom_Ellipse.hxx>
#include <IGESControl_Writer.hxx>
#include <Interface_Static.hxx>
#include <Message.hxx>
#include <Message_Messenger.hxx>
#include <Message_Printer.hxx>
#include <STEPControl_Writer.hxx>
#include <TColStd_Array1OfInteger.hxx>
#include <TColStd_Array1OfReal.hxx>
#include <TColgp_Array1OfPnt.hxx>
#include <TCollection_HAsciiString.hxx>

#include <cmath>
#include <utility>

namespace kf::test {
namespace {

using curve::Vec2;

gp_Pnt at(Vec2 p) {
  return {p.x, p.y, 0.0};
}

// Axes with x along `u`, turning the same way as the curve.
gp_Ax2 axes(Vec2 centre, Vec2 u, bool left) {
  return {at(centre), gp_Dir(0, 0, left ? 1 : -1), gp_Dir(u.x, u.y, 0)};
}

Handle(Geom_BSplineCurve) splineOf(const curve::Nurbs& spline) {
  std::vector<std::pair<double, int>> knots;
  for (const double knot : spline.knots) {
    if (!knots.empty() && knots.back().first == knot) {
      ++knots.back().second;
    } else {
      knots.emplace_back(knot, 1);
    }
  }
  const int count = static_cast<int>(knots.size()), poles = static_cast<int>(spline.poles.size());
  TColStd_Array1OfReal values(1, count), weights(1, poles);
  TColStd_Array1OfInteger times(1, count);
  TColgp_Array1OfPnt points(1, poles);
  for (int i = 1; i <= count; ++i) {
    values(i) = knots[static_cast<std::size_t>(i - 1)].first;
    times(i) = knots[static_cast<std::size_t>(i - 1)].second;
  }
  for (int i = 1; i <= poles; ++i) {
    const auto index = static_cast<std::size_t>(i - 1);
    points(i) = at(spline.poles[index]);
    weights(i) = spline.weights.empty() ? 1.0 : spline.weights[index];
  }
  return new Geom_BSplineCurve(points, weights, values, times, spline.degree);
}

void silence() {
  Message::DefaultMessenger()->RemovePrinters(STANDARD_TYPE(Message_Printer));
}

}  // namespace

TopoDS_Edge edgeOf(const curve::Curve& curve, const gp_Trsf& place) {
  Handle(Geom_Curve) geometry;
  double first = 0.0, last = 0.0;
  if (const curve::Line* line = curve.asLine()) {
    return BRepBuilderAPI_MakeEdge(at(line->a).Transformed(place), at(line->b).Transformed(place)).Edge();
  }
  if (const curve::Arc* arc = curve.asArc()) {
    const Vec2 u{std::cos(arc->start), std::sin(arc->start)};
    geometry = new Geom_Circle(axes(arc->centre, u, arc->sweep > 0.0), arc->radius);
    last = std::abs(arc->sweep);
  } else if (const curve::EllipticArc* e = curve.asEllipticArc()) {
    const bool left = (cross(e->u, e->v) > 0.0) == (e->sweep > 0.0);
    const bool swap = norm(e->u) < norm(e->v);  // the library wants the longer one first
    const double sign = e->sweep > 0.0 ? 1.0 : -1.0;
    geometry = swap ? new Geom_Ellipse(axes(e->centre, e->v, left), norm(e->v), norm(e->u))
                    : new Geom_Ellipse(axes(e->centre, e->u, left), norm(e->u), norm(e->v));
    // Along the curve the angle grows by sign * t; from v, u lies a quarter turn back or ahead.
    first = sign * e->start - (swap ? sign * 0.5 * M_PI : 0.0);
    last = first + std::abs(e->sweep);
  } else {
    const Handle(Geom_BSplineCurve) spline = splineOf(*curve.asNurbs());
    geometry = spline;
    first = spline->FirstParameter();
    last = spline->LastParameter();
  }
  geometry->Transform(place);
  BRepBuilderAPI_MakeEdge edge(geometry, first, last);
  return edge.IsDone() ? edge.Edge() : TopoDS_Edge();
}

TopoDS_Compound shapeOf(const std::vector<curve::Curve>& curves, const gp_Trsf& place) {
  TopoDS_Compound compound;
  BRep_Builder builder;
  builder.MakeCompound(compound);
  for (const curve::Curve& curve : curves) builder.Add(compound, edgeOf(curve, place));
  return compound;
}

bool writeStep(const TopoDS_Compound& shape, const std::string& path, const std::string& title) {
  silence();
  STEPControl_Writer writer;
  Interface_Static::SetCVal("write.step.product.name", title.c_str());
  if (writer.Transfer(shape, STEPControl_GeometricCurveSet) != IFSelect_RetDone) return false;
  APIHeaderSection_MakeHeader header(writer.Model());
  header.SetName(new TCollection_HAsciiString(title.c_str()));
  header.SetTimeStamp(new TCollection_HAsciiString("2024-05-01T00:00:00"));
  header.SetOriginatingSystem(new TCollection_HAsciiString(""));
  header.SetPreprocessorVersion(new TCollection_HAsciiString(""));
  return writer.Write(path.c_str()) == IFSelect_RetDone;
}

bool writeIges(const TopoDS_Compound& shape, const std::string& path, const char* unit) {
  silence();
  IGESControl_Writer writer(unit, 0);
  writer.AddShape(shape);
  writer.ComputeModel();
  return writer.Write(path.c_str());
}

}  // namespace kf::test
