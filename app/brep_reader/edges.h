// Edges of a boundary representation as exact curves in space.
// Lengths in mm, angles in rad.
#pragma once

#include <TopoDS_Edge.hxx>
#include <TopoDS_Shape.hxx>

#include <vector>

#include "app/brep_reader/flat.h"

namespace kf::brep {

// The curve of an edge, in the edge's direction: lines, circles, ellipses, and every other conic, Bezier and
// B-spline as an exact (rational) B-spline over the edge's range.
//
// Fails  unsupported      it has no curve in space, or one that is no B-spline (an offset curve).
//        invalidArgument  its range or its values are not finite or empty.
Result<SpaceCurve> spaceCurveOf(const TopoDS_Edge& edge);

// All different edges of the shape that are longer than a point, in the order in which it holds them.
std::vector<TopoDS_Edge> edgesOf(const TopoDS_Shape& shape);

}  // namespace kf::brep
