// What the HEADER section of a DXF file settles: units and text encoding; internal to read.
// mm per drawing unit.
#pragma once

#include <optional>
#include <string>
#include <string_view>

#include "core/read/dxf_groups.h"

namespace kf::read {

struct DxfHeader {
  std::optional<double> millimetresPerUnit;  // empty when $INSUNITS is missing or 0
  std::string unitName;
  std::string codePage;  // $DWGCODEPAGE, "ANSI_1252"
};

// Fails  cannotRead  $INSUNITS is none of the values the format knows.
Result<DxfHeader> readHeader(const Record& section, std::string_view name);

}  // namespace kf::read
