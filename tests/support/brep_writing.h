// Curves as shapes of the STEP and IGES library, and files of them: what the reading is tested with.
// Lengths in mm.
#pragma once

#include <TopoDS_Compound.hxx>
#include <TopoDS_Edge.hxx>
#include <gp_Trsf.hxx>

#include <string>
#include <vector>

#include "core/curve/curve.h"

namespace kf::test {

// The edge of one plane curve, moved into space. Domain: the half diameters of an elliptic arc are at right
// angles. An empty (null) edge when the library refuses.
TopoDS_Edge edgeOf(const curve::Curve& curve, const gp_Trsf& place);
TopoDS_Compound shapeOf(const std::vector<curve::Curve>& curves, const gp_Trsf& place);

// As a set of curves, in mm. False when the file could not be written.
bool writeStep(const TopoDS_Compound& shape, const std::string& path, const std::string& title);
bool writeIges(const TopoDS_Compound& shape, const std::string& path, const char* unit = "MM");

}  // namespace kf::test
