// From the record of one DXF entity to curves; internal to read.
// Lengths in drawing units, angles in rad.
#pragma once

#include <optional>
#include <string>
#include <string_view>
#include <vector>

#include "core/curve/curve.h"
#include "core/read/dxf_groups.h"

namespace kf::read {

// What one record became. Exactly one of: curves, an insert, or a reason why not.
struct InsertRef {
  std::string block;
  curve::Affine2 map;              // from the block's own coordinates, its base point not yet taken off
  std::vector<curve::Vec2> cells;  // offsets of an array's members, in the insert's own turned frame
  curve::Affine2 outer;            // object coordinate system and insertion point
};

struct EntityContent {
  std::vector<curve::Curve> curves;
  std::optional<InsertRef> insert;
  std::string skipReason;    // geometry that can't be used
  std::string ignoreReason;  // no geometry
};

// One vertex of a polyline.
struct BulgeVertex {
  curve::Vec2 point;
  double bulge = 0.0;
};

// Lines and arcs through the vertices. Bulge = tan(angle / 4), negative clockwise; that of the last vertex
// counts only when the polyline is closed. Source: the public DXF reference.
std::vector<curve::Curve> polylineCurves(const std::vector<BulgeVertex>& vertices, bool closed);

// The map from the object coordinate system to the plane; empty when the entity is not parallel to it.
// Source: the arbitrary axis rule of the public DXF reference. For (0, 0, -1) it mirrors x.
Result<std::optional<curve::Affine2>> objectMap(const Record& record, std::string_view name);

// Fails  cannotRead  a number that is none.
Result<EntityContent> interpret(const Record& record, std::string_view name);

}  // namespace kf::read
