// From the record of one DXF entity to curves; internal to read.
// Lengths in drawing units, angles in rad.
#pragma once

#include <memory>
#include <optional>
#include <string>
#include <string_view>
#include <vector>

#include "core/curve/curve.h"
#include "core/read/dxf_fields.h"

namespace kf::read {

// A block placed once, or many times in rows and columns. Counts are kept as counts: a file may claim
// millions.
struct InsertRef {
  std::string block;
  curve::Affine2 map;  // from the block's own coordinates, its base point not yet taken off
  long long columns = 1, rows = 1;
  curve::Vec2 step;      // between columns and rows, in the insert's own turned frame
  curve::Affine2 outer;  // object coordinate system and insertion point
};

// What one record became. Exactly one of: curves, an insert, or a reason why not.
struct EntityContent {
  std::vector<curve::Curve> curves;  // end to start where there are several
  std::unique_ptr<InsertRef> insert;
  std::string skipReason;    // geometry that can't be used
  std::string ignoreReason;  // no geometry
};

inline EntityContent skippedFor(std::string reason) {
  EntityContent c;
  c.skipReason = std::move(reason);
  return c;
}

// One vertex of a polyline.
struct BulgeVertex {
  curve::Vec2 point;
  double bulge = 0.0;
};

// Lines and arcs through the vertices. Bulge = tan(angle / 4), negative clockwise; that of the last vertex
// counts only when the polyline is closed. Source: the public DXF reference.
// An arc so flat that its centre would lie beyond the reach of rounding becomes a rational quadratic, which
// is the same arc.
std::vector<curve::Curve> polylineCurves(const std::vector<BulgeVertex>& vertices, bool closed);

// Two heights that differ by rounding only, for an entity of that size.
bool sameLevel(double a, double b, double size);

// The map from the object coordinate system to the plane; empty when the entity is not parallel to it.
// Source: the arbitrary axis rule of the public DXF reference. For (0, 0, -1) it mirrors x.
std::optional<curve::Affine2> objectMap(Fields& fields);

// The boundary of a filled area (HATCH): polylines and edge loops, in file order.
EntityContent hatchBoundary(Fields& fields, const curve::Affine2& map);

// `hatchBoundaries`: boundaries of HATCH count as geometry.
// Fails  cannotRead  a number that is none.
Result<EntityContent> interpret(const Record& record, bool hatchBoundaries, std::string_view name);

}  // namespace kf::read
