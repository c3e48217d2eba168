// DXF written by hand for tests: a few entities with the least around them.
// Lengths in drawing units.
#pragma once

#include <cstdio>
#include <string>
#include <string_view>

namespace kf::read {

// All digits of `value`.
inline std::string digits(double value) {
  char text[40];
  std::snprintf(text, sizeof text, "%.17g", value);
  return text;
}

// "0 LINE 8 0 10 1.5": blanks become line ends.
inline std::string lines(std::string_view words) {
  std::string text(words);
  for (char& c : text) {
    if (c == ' ') c = '\n';
  }
  if (!text.empty()) text += '\n';
  return text;
}

struct DxfParts {
  std::string header = "9 $INSUNITS 70 4";
  std::string tables, blocks, entities;
};

inline std::string dxf(const DxfParts& parts) {
  return lines("0 SECTION 2 HEADER") + lines(parts.header) + lines("0 ENDSEC 0 SECTION 2 TABLES") +
         lines(parts.tables) + lines("0 ENDSEC 0 SECTION 2 BLOCKS") + lines(parts.blocks) +
         lines("0 ENDSEC 0 SECTION 2 ENTITIES") + lines(parts.entities) + lines("0 ENDSEC 0 EOF");
}

inline std::string dxf(std::string entities) {
  DxfParts parts;
  parts.entities = std::move(entities);
  return dxf(parts);
}

}  // namespace kf::read
