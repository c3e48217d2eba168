// DXF entities, blocks, layers, units and encodings as curves.
// Lengths in drawing units, angles in rad.
#include <cmath>
#include <numbers>

#include <gmock/gmock.h>
#include <gtest/gtest.h>

#include "core/curve/arc_length.h"
#include "core/read/drawing.h"
#include "tests/core/read/dxf_text.h"

namespace kf::read {
namespace {

using ::testing::ElementsAre;
using ::testing::HasSubstr;
using ::testing::IsEmpty;

constexpr double kPi = std::numbers::pi;

Result<Drawing> tryRead(const std::string& text, const ReadOptions& options = {}) {
  RunControl control;
  return readDxf(text, "a.dxf", options, control);
}

Drawing readWell(const std::string& text, const ReadOptions& options = {}) {
  auto drawing = tryRead(text, options);
  EXPECT_TRUE(drawing) << drawing.error().message;
  return drawing ? std::move(*drawing) : Drawing{};
}

std::string refusal(const std::string& text) {
  const auto drawing = tryRead(text);
  return drawing ? "accepted" : drawing.error().message;
}

double totalLength(const Drawing& drawing) {
  double sum = 0.0;
  for (const auto& loose : drawing.curves) sum += curve::totalLength(loose.curve);
  return sum;
}

curve::Box boundsOf(const Drawing& drawing) {
  curve::Box box;
  for (const auto& loose : drawing.curves) box.include(loose.curve.bounds());
  return box;
}

void expectPoint(curve::Vec2 p, double x, double y) {
  EXPECT_NEAR(p.x, x, 1e-12);
  EXPECT_NEAR(p.y, y, 1e-12);
}

// Source of the four figures: the public DXF reference's bulge = tan(angle / 4), worked out by hand.
TEST(DxfBulge, GivesTheArcsOfTheReference) {
  struct Case {
    double bulge, x, y, radius, length;
  };
  const double eighth = std::tan(kPi / 8.0);
  for (const Case& c :
       {Case{1.0, 5, 0, 5, 5 * kPi}, Case{eighth, 5, 5, 5 * std::sqrt(2.0), 5 * std::sqrt(2.0) * kPi / 2},
        Case{0.5, 5, 3.75, 6.25, 6.25 * 4 * std::atan(0.5)}, Case{2.0, 5, -3.75, 6.25, 27.6787179448523}}) {
    const Drawing d =
        readWell(dxf("0 LWPOLYLINE 8 0 90 2 70 0 10 0 20 0 42 " + digits(c.bulge) + " 10 10 20 0"));
    ASSERT_EQ(d.curves.size(), 1U);
    const curve::Arc* arc = d.curves[0].curve.asArc();
    ASSERT_NE(arc, nullptr);
    expectPoint(arc->centre, c.x, c.y);
    EXPECT_NEAR(arc->radius, c.radius, 1e-12);
    EXPECT_NEAR(totalLength(d), c.length, 1e-12);
    EXPECT_GT(arc->sweep, 0.0);
  }
}

TEST(DxfBulge, TurnsClockwiseWhenNegativeAndCountsOnTheLastVertexOnlyWhenClosed) {
  const std::string vertices = " 10 0 20 0 42 -1 10 10 20 0 42 1";
  const Drawing open = readWell(dxf("0 LWPOLYLINE 8 0 90 2 70 0" + vertices));
  ASSERT_EQ(open.curves.size(), 1U);
  EXPECT_LT(open.curves[0].curve.asArc()->sweep, 0.0);
  EXPECT_NEAR(boundsOf(open).high.y, 5.0, 1e-12);
  const Drawing closed = readWell(dxf("0 LWPOLYLINE 8 0 90 2 70 1" + vertices));
  ASSERT_EQ(closed.curves.size(), 2U);
  EXPECT_TRUE(closed.curves[1].follows);
  EXPECT_FALSE(closed.curves[0].follows);
}

// The sagitta of a chord c under bulge b is b c / 2 exactly.
TEST(DxfBulge, KeepsItsSagittaHoweverFlatTheArc) {
  for (double bulge : {1e-3, 1e-4, 9e-5, 1e-5, 1e-7, 1e-9, 1e-11}) {
    const Drawing d =
        readWell(dxf("0 LWPOLYLINE 8 0 90 2 70 0 10 100 20 7 42 " + digits(bulge) + " 10 1100 20 7"));
    ASSERT_EQ(d.curves.size(), 1U);
    const curve::Curve& c = d.curves[0].curve;
    const curve::Vec2 middle = c.point(0.5 * (c.first() + c.last()));
    EXPECT_NEAR(7.0 - middle.y, 500.0 * bulge, 2e-9) << bulge;
    // The centre of an arc lies 1 / (4 bulge) chords away, and its rounding with it.
    const double rounding = bulge < 1e-4 ? 1e-12 : 1000.0 * 2.3e-16 / bulge;
    EXPECT_NEAR(c.startPoint().x, 100.0, rounding) << bulge;
    EXPECT_NEAR(c.endPoint().x, 1100.0, rounding) << bulge;
  }
}

TEST(DxfPolyline, OfOldKindLeavesOutControlPointsOfAFittedCurve) {
  const Drawing d =
      readWell(dxf("0 POLYLINE 8 0 66 1 70 4 0 VERTEX 8 0 10 0 20 0 70 8 0 VERTEX 8 0 10 50 20 50 70 16 "
                   "0 VERTEX 8 0 10 3 20 4 70 8 0 SEQEND"));
  EXPECT_NEAR(totalLength(d), 5.0, 1e-12);
}

TEST(DxfPolyline, MeshesAndPathsThatLeaveThePlaneAreSkippedByName) {
  const Drawing d = readWell(
      dxf("0 POLYLINE 8 0 70 16 0 VERTEX 10 0 20 0 0 VERTEX 10 1 20 0 0 SEQEND 0 POLYLINE 8 0 70 8 "
          "0 VERTEX 10 0 20 0 30 0 0 VERTEX 10 1 20 0 30 2 0 SEQEND 0 LINE 10 0 20 0 30 0 11 1 21 1 31 4"));
  EXPECT_THAT(d.curves, IsEmpty());
  ASSERT_EQ(d.skipped.size(), 3U);
  EXPECT_EQ(d.skipped[0].reason, "a mesh has no contour");
  EXPECT_EQ(d.skipped[1].reason, "it leaves the XY plane");
  EXPECT_EQ(d.skipped[2].kind, "LINE");
}

// A line and a spline are in world coordinates: their extrusion does not matter.
TEST(DxfExtrusion, OfALineDoesNotMatter) {
  const Drawing d = readWell(dxf("0 LINE 10 0 20 0 30 5 11 3 21 4 31 5 210 1 220 0 230 0"));
  ASSERT_EQ(d.curves.size(), 1U);
  EXPECT_NEAR(totalLength(d), 5.0, 1e-12);
}

TEST(DxfExtrusion, FromBehindMirrorsX) {
  const Drawing d = readWell(dxf("0 ARC 10 10 20 5 40 2 50 0 51 90 210 0 220 0 230 -1"));
  ASSERT_EQ(d.curves.size(), 1U);
  expectPoint(d.curves[0].curve.startPoint(), -12.0, 5.0);
  expectPoint(d.curves[0].curve.endPoint(), -10.0, 7.0);
  const Drawing tilted = readWell(dxf("0 ARC 10 10 20 5 40 2 50 0 51 90 210 0 220 1 230 0"));
  ASSERT_EQ(tilted.skipped.size(), 1U);
  EXPECT_EQ(tilted.skipped[0].reason, "it is not parallel to the XY plane");
}

TEST(DxfSpline, KeepsWeightsWhateverItsFlagsSay) {
  // The quarter circle of The NURBS Book (from memory): t = 1/2 is (3/5, 4/5).
  const Drawing d = readWell(
      dxf("0 SPLINE 70 0 71 2 40 0 40 0 40 0 40 1 40 1 40 1 10 1 20 0 10 1 20 1 10 0 20 1 41 1 41 1 41 2"));
  ASSERT_EQ(d.curves.size(), 1U);
  expectPoint(d.curves[0].curve.point(0.5), 0.6, 0.8);
  EXPECT_NEAR(totalLength(d), kPi / 2.0, 1e-12);
}

TEST(DxfSpline, ThatBreaksARuleIsSkippedWithTheRule) {
  const Drawing d =
      readWell(dxf("0 SPLINE 70 0 71 3 72 999999999 73 999999999 40 0 40 1 10 0 20 0 10 1 20 1"));
  ASSERT_EQ(d.skipped.size(), 1U);
  EXPECT_THAT(d.skipped[0].reason, HasSubstr("needs at least 4 poles, not 2"));
}

constexpr const char* kBlock = "0 BLOCK 2 Hole 70 0 10 1 20 2 0 LINE 8 0 10 1 20 2 11 2 21 2 0 ENDBLK";

TEST(DxfInsert, TakesOffTheBasePointThenScalesTurnsAndMoves) {
  DxfParts parts;
  parts.blocks = kBlock;
  parts.entities = "0 INSERT 8 cut 2 HOLE 10 10 20 20 41 -3 42 2 50 90";
  const Drawing d = readWell(dxf(parts));
  ASSERT_EQ(d.curves.size(), 1U);
  expectPoint(d.curves[0].curve.startPoint(), 10.0, 20.0);
  expectPoint(d.curves[0].curve.endPoint(), 10.0, 17.0);
  EXPECT_EQ(d.curves[0].layer, "cut");  // layer 0 in a block takes its insert's layer
  EXPECT_THAT(d.layers, ElementsAre("cut"));
}

TEST(DxfInsert, ArraysStepInItsOwnTurnedFrameUnscaled) {
  DxfParts parts;
  parts.blocks = kBlock;
  parts.entities = "0 INSERT 2 Hole 10 0 20 0 41 5 42 5 50 90 70 3 71 2 44 10 45 100";
  const Drawing d = readWell(dxf(parts));
  ASSERT_EQ(d.curves.size(), 6U);
  expectPoint(d.curves[1].curve.startPoint(), 0.0, 10.0);
  expectPoint(d.curves[3].curve.startPoint(), -100.0, 0.0);
}

TEST(DxfInsert, OfABlockThatIsMissingOrElsewhereIsSkippedByName) {
  DxfParts parts;
  parts.blocks = "0 BLOCK 2 Away 70 4 1 other.dwg 0 ENDBLK";
  parts.entities = "0 INSERT 2 Away 10 0 20 0 0 INSERT 2 Nowhere 10 0 20 0";
  const Drawing d = readWell(dxf(parts));
  ASSERT_EQ(d.skipped.size(), 2U);
  EXPECT_EQ(d.skipped[0].reason, "its block lies in another file");
  EXPECT_EQ(d.skipped[1].reason, "its block is not in the file");
  EXPECT_THAT(d.skipped[1].firstPlace, HasSubstr("'Nowhere'"));
}

TEST(DxfInsert, OfABlockInItselfIsRefused) {
  DxfParts parts;
  parts.blocks = "0 BLOCK 2 A 10 0 20 0 0 INSERT 2 A 10 1 20 1 0 ENDBLK";
  parts.entities = "0 INSERT 2 A 10 0 20 0";
  EXPECT_THAT(refusal(dxf(parts)), HasSubstr("contain themselves"));
}

TEST(DxfInsert, ExponentialNestingIsRefusedAndNotWorkedOff) {
  DxfParts parts;
  parts.blocks = "0 BLOCK 2 B0 10 0 20 0 0 ENDBLK";  // even when it draws nothing
  for (int i = 1; i < 30; ++i) {
    parts.blocks += " 0 BLOCK 2 B" + std::to_string(i) + " 10 0 20 0 0 INSERT 2 B" + std::to_string(i - 1) +
                    " 70 300 71 300 44 1 45 1 0 ENDBLK";
  }
  parts.entities = "0 INSERT 2 B29 10 0 20 0";
  EXPECT_THAT(refusal(dxf(parts)), HasSubstr("nested without end"));
}

TEST(DxfLayers, OffAndFrozenOnesAreLeftOutAndReported) {
  DxfParts parts;
  parts.tables = "0 TABLE 2 LAYER 70 3 0 LAYER 2 Off 70 0 62 -7 0 LAYER 2 Frozen 70 1 62 7 0 ENDTAB";
  parts.blocks =
      "0 BLOCK 2 B 10 0 20 0 0 LINE 8 seen 10 0 20 0 11 1 21 0 0 LINE 8 0 10 0 20 0 11 1 21 0 0 ENDBLK";
  parts.entities =
      "0 LINE 8 OFF 10 0 20 0 11 1 21 0 0 LINE 8 frozen 10 0 20 0 11 1 21 0 0 LINE 8 Other 10 0 20 0 11 1 21 "
      "0 "
      "0 INSERT 8 off 2 b 10 0 20 0 0 INSERT 8 frozen 2 b 10 0 20 0";
  const Drawing d = readWell(dxf(parts));
  EXPECT_THAT(d.layers, ElementsAre("Other", "seen"));
  EXPECT_THAT(d.skipped, IsEmpty());
  std::size_t off = 0, frozen = 0;
  for (const Skipped& row : d.ignored) {
    off += row.reason == "its layer is off" ? row.count : 0;
    frozen += row.reason == "its layer is frozen" ? row.count : 0;
  }
  EXPECT_EQ(off, 2U);     // the line, and the line of layer 0 inside the block
  EXPECT_EQ(frozen, 2U);  // the line, and the whole insert
}

TEST(DxfLayers, ChosenOnesAreReadEvenWhenOff) {
  DxfParts parts;
  parts.tables = "0 TABLE 2 LAYER 0 LAYER 2 Off 70 0 62 -7 0 ENDTAB";
  parts.entities = "0 LINE 8 Off 10 0 20 0 11 1 21 0 0 LINE 8 Other 10 0 20 0 11 1 21 0";
  ReadOptions options;
  options.layers = {"off"};
  const Drawing d = readWell(dxf(parts), options);
  EXPECT_THAT(d.layers, ElementsAre("Off"));
  ASSERT_EQ(d.ignored.size(), 1U);
  EXPECT_EQ(d.ignored[0].reason, "its layer was not chosen");
}

TEST(DxfLayers, NamesComeInUtf8FromAnyEncoding) {
  const auto layerOf = [](const std::string& header, const std::string& bytes) {
    DxfParts parts;
    parts.header = header;
    parts.entities = "0 LINE 8 " + bytes + " 10 0 20 0 11 1 21 0";
    const Drawing d = readWell(dxf(parts));
    return d.layers.empty() ? std::string() : d.layers[0];
  };
  EXPECT_EQ(layerOf("9 $ACADVER 1 AC1032", "Fl\xC3\xBCgel"), "Fl\xC3\xBCgel");
  EXPECT_EQ(layerOf("9 $DWGCODEPAGE 3 ANSI_1252", "Fl\xFCgel"), "Fl\xC3\xBCgel");
  EXPECT_EQ(layerOf("9 $DWGCODEPAGE 3 ANSI_1251", "\xEA\xF0\xFB\xEB\xEE"), "крыло");
  EXPECT_EQ(layerOf("9 $DWGCODEPAGE 3 ANSI_932", "\x97\x83"), "翼");
  EXPECT_EQ(layerOf("9 $DWGCODEPAGE 3 nonsense", "Fl\xFCgel"), "Fl\xC3\xBCgel");
  EXPECT_EQ(layerOf("9 $ACADVER 1 AC1015", "Fl\\U+00FCgel"), "Fl\xC3\xBCgel");
  EXPECT_EQ(layerOf("9 $ACADVER 1 AC1015", "a\\U+D800\\U+"), "a\\U+D800\\U+");
}

// Source: the public DXF reference, $INSUNITS.
TEST(DxfUnits, AreThoseOfTheReference) {
  const auto unitOf = [](int code) {
    DxfParts parts;
    parts.header = "9 $INSUNITS 70 " + std::to_string(code);
    return readWell(dxf(parts)).millimetresPerUnit;
  };
  EXPECT_FALSE(unitOf(0));
  EXPECT_DOUBLE_EQ(*unitOf(1), 25.4);
  EXPECT_DOUBLE_EQ(*unitOf(2), 304.8);
  EXPECT_DOUBLE_EQ(*unitOf(4), 1.0);
  EXPECT_DOUBLE_EQ(*unitOf(9), 0.0254);
  EXPECT_DOUBLE_EQ(*unitOf(13), 1e-3);
  EXPECT_DOUBLE_EQ(*unitOf(21), 1200.0 / 3937.0 * 1000.0);
  DxfParts parts;
  parts.header = "9 $INSUNITS 70 25";
  EXPECT_THAT(refusal(dxf(parts)), HasSubstr("$INSUNITS must be 0 to 24"));
}

TEST(DxfAnnotation, IsCountedAndNeedsNoConsent) {
  const Drawing d =
      readWell(dxf("0 LINE 10 0 20 0 11 1 21 0 0 TEXT 10 0 20 0 1 hi 0 TEXT 10 0 20 0 1 hi 0 POINT 10 0 20 0 "
                   "0 3DSOLID 70 1 "
                   "0 LINE 67 1 10 0 20 0 11 1 21 0"));
  EXPECT_EQ(d.curves.size(), 1U);
  ASSERT_EQ(d.ignored.size(), 3U);
  EXPECT_EQ(d.ignored[0].count, 2U);
  EXPECT_EQ(d.ignored[0].firstPlace, "line 38");
  EXPECT_EQ(d.ignored[2].reason, "it stands on the paper sheet, not in the drawing");
  ASSERT_EQ(d.skipped.size(), 1U);
  EXPECT_EQ(d.skipped[0].kind, "3DSOLID");
}

TEST(DxfHatch, IsANoteUnlessItsBoundaryIsWanted) {
  const std::string text = dxf(
      "0 HATCH 8 0 10 0 20 0 30 0 2 SOLID 70 1 71 0 91 1 92 2 72 1 73 1 93 3 10 0 20 0 42 0 10 3 20 0 42 0 "
      "10 3 20 4 42 0 97 0 75 1 76 1 98 1 10 1 20 1");
  EXPECT_EQ(readWell(text).ignored.size(), 1U);
  ReadOptions options;
  options.hatchBoundaries = true;
  const Drawing d = readWell(text, options);
  EXPECT_EQ(d.curves.size(), 3U);
  EXPECT_NEAR(totalLength(d), 12.0, 1e-12);
}

TEST(DxfRefusals, SayWhatAndWhere) {
  EXPECT_THAT(refusal(dxf("0 LINE 10 abc 20 0 11 1 21 0")),
              HasSubstr("a.dxf line 30: group 10 must be a number, not 'abc'"));
  EXPECT_THAT(refusal(dxf("0 LINE 10 nan 20 0 11 1 21 0")), HasSubstr("must be a number"));
  EXPECT_THAT(refusal(dxf("0 LINE 10 1e999 20 0 11 1 21 0")), HasSubstr("must be a number"));
  EXPECT_THAT(refusal(dxf("0 LINE 10 0x10 20 0 11 1 21 0")), HasSubstr("must be a number"));
  EXPECT_THAT(refusal(dxf("0 LINE 10 1,5 20 0 11 1 21 0")), HasSubstr("must be a number"));
  EXPECT_THAT(refusal("0\nSECTION\n2\nENTITIES\n0\nENDSEC\n"), HasSubstr("ends at line 6 without EOF"));
  EXPECT_THAT(refusal("0\nEOF\n"), HasSubstr("no ENTITIES section"));
  EXPECT_THAT(refusal("AC1032\x01\x02"), HasSubstr("save it as DXF"));
}

TEST(DxfRefusals, CoordinatesOutOfRangeSkipTheirEntity) {
  const Drawing d =
      readWell(dxf("0 LINE 10 1e308 20 0 11 -1e308 21 0 0 LWPOLYLINE 70 0 10 0 20 0 42 1e308 10 1 20 0 0 "
                   "CIRCLE 10 0 20 0 40 1e300 "
                   "0 LINE 10 0 20 0 11 1 21 0"));
  EXPECT_EQ(d.curves.size(), 1U);
  EXPECT_TRUE(std::isfinite(totalLength(d)));
  std::size_t skipped = 0;
  for (const Skipped& row : d.skipped) skipped += row.count;
  EXPECT_EQ(skipped, 3U);
}

}  // namespace
}  // namespace kf::read
