// What the HEADER section of a DXF file settles: units and text encoding.
// mm per drawing unit.
#include "core/read/dxf_header.h"

#include <array>

#include <fmt/format.h>

#include "core/read/text.h"

namespace kf::read {
namespace {

struct Unit {
  std::string_view name;
  double millimetres;
};

// $INSUNITS 0..24. Source: the public DXF reference; US survey foot = 1200/3937 m.
constexpr double kSurveyFoot = 1200.0 / 3937.0 * 1000.0;
constexpr std::array<Unit, 25> kUnits = {{{"", 0.0},
                                          {"in", 25.4},
                                          {"ft", 304.8},
                                          {"mi", 1609344.0},
                                          {"mm", 1.0},
                                          {"cm", 10.0},
                                          {"m", 1000.0},
                                          {"km", 1e6},
                                          {"microinch", 25.4e-6},
                                          {"mil", 0.0254},
                                          {"yd", 914.4},
                                          {"angstrom", 1e-7},
                                          {"nm", 1e-6},
                                          {"um", 1e-3},
                                          {"dm", 100.0},
                                          {"dam", 1e4},
                                          {"hm", 1e5},
                                          {"Gm", 1e12},
                                          {"au", 149597870700e3},
                                          {"ly", 9460730472580.8e6},
                                          {"pc", 3.0856775814913673e19},
                                          {"US survey ft", kSurveyFoot},
                                          {"US survey in", kSurveyFoot / 12.0},
                                          {"US survey yd", 3.0 * kSurveyFoot},
                                          {"US survey mi", 5280.0 * kSurveyFoot}}};

}  // namespace

Result<DxfHeader> readHeader(const Record& section, std::string_view name) {
  DxfHeader header;
  std::string_view variable;
  for (const Group& g : section.groups) {
    if (g.code == 9) variable = trimmed(g.value);
    if (variable == "$DWGCODEPAGE" && g.code == 3)
      header.codePage = std::string(trimmed(g.value).substr(0, 40));
    if (variable != "$INSUNITS" || g.code != 70) continue;
    const auto code = integerOf(g, name);
    if (!code || *code < 0 || *code >= static_cast<long long>(kUnits.size())) {
      return Error{ErrorCode::cannotRead,
                   fmt::format("{} {}: $INSUNITS must be 0 to {}, not '{}'; correct it", name, g.place(),
                               kUnits.size() - 1, g.shown())};
    }
    const Unit& unit = kUnits[static_cast<std::size_t>(*code)];
    if (unit.millimetres > 0.0) {
      header.millimetresPerUnit = unit.millimetres;
      header.unitName = unit.name;
    }
  }
  return header;
}

}  // namespace kf::read
