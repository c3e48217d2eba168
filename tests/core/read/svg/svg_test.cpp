// SVG drawings: exact shapes, the page, styles, uses, and what is refused.
// Lengths in the page's unit.
#include <cmath>
#include <fstream>
#include <numbers>
#include <sstream>
#include <string>

#include <gmock/gmock.h>
#include <gtest/gtest.h>

#include "core/curve/arc_length.h"
#include "core/read/drawing.h"
#include "core/read/svg_path.h"
#include "core/read/svg_scan.h"

namespace kf::read {
namespace {

using curve::Curve;
using curve::Vec2;
using ::testing::HasSubstr;

constexpr double kPi = std::numbers::pi;

Result<Drawing> read(const std::string& text, const ReadOptions& options = {}) {
  RunControl control;
  return readSvg(text, "test.svg", options, control);
}

// A page of 200 x 100 mm with one user unit a millimetre.
std::string page(const std::string& content) {
  return "<svg xmlns=\"http://www.w3.org/2000/svg\" xmlns:xlink=\"http://www.w3.org/1999/xlink\" "
         "width=\"200mm\" "
         "height=\"100mm\" viewBox=\"0 0 200 100\">\n" +
         content + "\n</svg>\n";
}

Drawing whole(const std::string& content) {
  auto drawing = read(page(content));
  EXPECT_TRUE(drawing.ok()) << (drawing.ok() ? "" : drawing.error().message);
  if (!drawing) return {};
  EXPECT_TRUE(drawing->skipped.empty()) << drawing->skipped.front().kind << drawing->skipped.front().reason;
  return *std::move(drawing);
}

double lengthOf(const Drawing& drawing) {
  double sum = 0.0;
  for (const auto& loose : drawing.curves) sum += curve::totalLength(loose.curve);
  return sum;
}

curve::Box boxOf(const Drawing& drawing) {
  curve::Box box;
  for (const auto& loose : drawing.curves) box.include(loose.curve.bounds());
  return box;
}

std::vector<Curve> path(const std::string& data) {
  auto curves = svg::pathCurves(data);
  EXPECT_TRUE(curves.ok()) << data << ": " << (curves.ok() ? "" : curves.error().message);
  return curves.ok() ? *std::move(curves) : std::vector<Curve>();
}

void expectPoint(Vec2 a, Vec2 b, double tolerance = 1e-12) {
  EXPECT_NEAR(a.x, b.x, tolerance);
  EXPECT_NEAR(a.y, b.y, tolerance);
}

// SVG 2, implementation notes B.2.5: the radii are scaled up until the ends can be reached (mpmath).
TEST(SvgArc, ScalesRadiiThatAreTooSmall) {
  const auto curves = path("M100,350 A25,25 -30 0,1 150,325");
  ASSERT_EQ(curves.size(), 1U);
  const curve::Arc* arc = curves[0].asArc();
  ASSERT_NE(arc, nullptr);
  EXPECT_NEAR(arc->radius, 27.9508497187474, 1e-12);
  expectPoint(arc->centre, {125.0, 337.5}, 1e-12);
  EXPECT_NEAR(curve::totalLength(curves[0]), 87.8101841380091, 1e-12);
  expectPoint(curves[0].startPoint(), {100, 350});
  expectPoint(curves[0].endPoint(), {150, 325});
}

// SVG 1.1, 8.3.8 (from memory), recomputed with mpmath.
TEST(SvgArc, TakesTheLargeArcOfTheSpecificationsExample) {
  const auto curves = path("M300,200 h-0 A150,150 0 1,0 450,50");
  ASSERT_EQ(curves.size(), 1U);
  const curve::Arc* arc = curves[0].asArc();
  ASSERT_NE(arc, nullptr);
  expectPoint(arc->centre, {450, 200}, 1e-10);
  EXPECT_NEAR(arc->sweep, -1.5 * kPi, 1e-12);
  EXPECT_NEAR(curve::totalLength(curves[0]), 706.858347057703, 1e-9);
}

// Every arc must satisfy what defines it: it starts and ends where it should, its axes and turn are those
// asked for, and it spans more than half a turn just when it is large.
TEST(SvgArc, MeetsItsDefinitionForAllFlagsAndTurns) {
  for (double degrees : {-75.0, 0.0, 30.0, 90.0, 200.0}) {
    for (int flags = 0; flags < 4; ++flags) {
      const bool large = (flags & 1) != 0, sweep = (flags & 2) != 0;
      const double turn = degrees * kPi / 180.0;
      const auto curves = svg::arcBetween({10, 20}, {40, 15}, turn, large, sweep, {30, 28});
      ASSERT_EQ(curves.size(), 1U);
      const curve::EllipticArc* e = curves[0].asEllipticArc();
      ASSERT_NE(e, nullptr);
      expectPoint(curves[0].startPoint(), {10, 20}, 1e-12);
      expectPoint(curves[0].endPoint(), {30, 28}, 1e-12);
      expectPoint(e->u, {40 * std::cos(turn), 40 * std::sin(turn)}, 1e-13);
      expectPoint(e->v, {-15 * std::sin(turn), 15 * std::cos(turn)}, 1e-13);
      EXPECT_EQ(std::abs(e->sweep) > kPi, large);
      EXPECT_EQ(e->sweep > 0.0, sweep);
    }
  }
}

TEST(SvgArc, DegeneratesAsTheSpecificationSays) {
  EXPECT_NE(svg::arcBetween({0, 0}, {0, 5}, 0, false, false, {3, 4})[0].asLine(), nullptr);
  EXPECT_TRUE(svg::arcBetween({3, 4}, {5, 5}, 0, true, true, {3, 4}).empty());
  const auto negative = svg::arcBetween({0, 0}, {-5, -5}, 0, false, true, {10, 0});
  EXPECT_NEAR(negative[0].asArc()->radius, 5.0, 1e-15);
  EXPECT_EQ(negative[0].asArc()->sweep, kPi);
}

TEST(SvgPath, ReadsEveryCommandAbsoluteAndRelative) {
  const auto absolute = path(
      "M10 10 L20 10 H30 V20 C30 30 40 30 40 20 S50 10 50 20 Q55 30 60 20 T70 20 "
      "A5 5 0 0 1 80 20 Z");
  const auto relative = path(
      "m10 10 l10 0 h10 v10 c0 10 10 10 10 0 s10-10 10 0 q5 10 10 0 t10 0 "
      "a5 5 0 0 1 10 0 z");
  ASSERT_EQ(absolute.size(), 9U);
  ASSERT_EQ(relative.size(), 9U);
  for (std::size_t i = 0; i < absolute.size(); ++i) {
    for (double u : {0.0, 0.3, 1.0}) expectPoint(absolute[i].point(u), relative[i].point(u), 1e-12);
  }
  EXPECT_EQ(absolute[3].asNurbs()->degree, 3);
  EXPECT_EQ(absolute[5].asNurbs()->degree, 2);
  // S mirrors the last control point, (40, 30) about (40, 20); T mirrors (55, 30) about (60, 20).
  expectPoint(absolute[4].asNurbs()->poles[1], {40, 10});
  expectPoint(absolute[6].asNurbs()->poles[1], {65, 10});
  expectPoint(absolute[8].endPoint(), {10, 10});
}

TEST(SvgPath, ReadsCompactNumbersFlagsAndRepeats) {
  const auto curves = path("M.5.5-1e1,2-.25.75a1 1 0 01.5.5 1,1,0,1,0-1-1L1e-1+3");
  ASSERT_EQ(curves.size(), 5U);
  expectPoint(curves[0].startPoint(), {0.5, 0.5});
  expectPoint(curves[0].endPoint(), {-10.0, 2.0});
  expectPoint(curves[1].endPoint(), {-0.25, 0.75});
  expectPoint(curves[2].endPoint(), {0.25, 1.25});
  expectPoint(curves[3].endPoint(), {-0.75, 0.25});
  expectPoint(curves[4].endPoint(), {0.1, 3.0});
}

TEST(SvgPath, StartsANewSubpathWhereTheClosedOneBegan) {
  const auto curves = path("m1 1h4v4z l-1-1 m1 1 2 0");
  ASSERT_EQ(curves.size(), 5U);
  expectPoint(curves[3].startPoint(), {1, 1});
  expectPoint(curves[3].endPoint(), {0, 0});
  expectPoint(curves[4].startPoint(), {1, 1});
}

// The curve of section 3 of the check values: length and curvature with mpmath.
TEST(SvgPath, KeepsABezierExactly) {
  const auto curves = path("M0 0C0 50 50 100 100 100");
  ASSERT_EQ(curves.size(), 1U);
  EXPECT_NEAR(curve::totalLength(curves[0]), 154.886798803186, 1e-11);
  EXPECT_NEAR(curve::bend(curves[0].jet(0.5)).k, -0.00838052481406279, 1e-16);
}

TEST(SvgPath, TakesAStraightBezierForALine) {
  EXPECT_NE(path("M0 0C1 1 2 2 3 3")[0].asLine(), nullptr);
  EXPECT_NE(path("M0 0C0 0 3 3 3 3")[0].asLine(), nullptr);
  EXPECT_NE(path("M0 0C-1-1 2 2 3 3")[0].asNurbs(), nullptr);  // it overshoots
  EXPECT_TRUE(path("M1 1C1 1 1 1 1 1").empty());
}

TEST(SvgPath, NamesTheCharacterThatIsWrong) {
  for (const char* data :
       {"L1 1", "M1", "M1,,1", "M1 1 L2 2,", "M0 0 A5 5 0 2 0 1 1", "M0 0 X", "M0 0 L1e999 0", "M0 0 Linf 0",
        "M0 0 Lnan 1", "M 0 0 z 3 4", "M0 0 L1 1 L", "0 0"}) {
    auto curves = svg::pathCurves(data);
    ASSERT_FALSE(curves.ok()) << data;
    EXPECT_THAT(curves.error().message, HasSubstr("character ")) << data;
  }
  EXPECT_THAT(svg::pathCurves("M0 0 L5 x").error().message, HasSubstr("character 9 "));
}

TEST(SvgShapes, HaveTheLengthsOfTheirClosedForms) {
  EXPECT_NEAR(lengthOf(whole("<rect x='1' y='2' width='30' height='20'/>")), 100.0, 1e-12);
  EXPECT_NEAR(lengthOf(whole("<rect width='30' height='20' rx='4'/>")), 100.0 - 32.0 + 8.0 * kPi, 1e-12);
  EXPECT_NEAR(lengthOf(whole("<circle cx='50' cy='50' r='10'/>")), 20.0 * kPi, 1e-12);
  EXPECT_NEAR(lengthOf(whole("<line x1='1' y1='1' x2='4' y2='5' stroke='red'/>")), 5.0, 1e-15);
  EXPECT_NEAR(lengthOf(whole("<polyline points='0,0 3,4 3,8'/>")), 9.0, 1e-15);
  EXPECT_NEAR(lengthOf(whole("<polygon points='0 0 3 0 3,4'/>")), 12.0, 1e-15);
  // DLMF 19.30(i), ellipse 50 x 30, with mpmath.
  EXPECT_NEAR(lengthOf(whole("<ellipse cx='100' cy='50' rx='50' ry='30'/>")), 255.26998863398128, 1e-11);
}

TEST(SvgShapes, ClampTheRadiiOfARectangle) {
  const Drawing drawing = whole("<rect width='40' height='20' rx='90' ry='30'/>");  // an ellipse 20 x 10
  EXPECT_EQ(drawing.curves.size(), 4U);
  for (const auto& loose : drawing.curves) EXPECT_NE(loose.curve.asEllipticArc(), nullptr);
  // Complete elliptic integral: 4 * 20 * E(3/4), mpmath.
  EXPECT_NEAR(lengthOf(drawing), 96.884482205476762, 1e-11);
}

TEST(SvgShapes, StayCirclesUnderTurnsAndBecomeEllipsesUnderStretch) {
  const Drawing turned = whole("<circle r='10' transform='translate(50 50) rotate(30) scale(2)'/>");
  ASSERT_NE(turned.curves[0].curve.asArc(), nullptr);
  EXPECT_NEAR(turned.curves[0].curve.asArc()->radius, 20.0, 1e-13);
  const Drawing stretched = whole("<g transform='scale(5 3)'><circle cx='12' cy='12' r='10'/></g>");
  ASSERT_NE(stretched.curves[0].curve.asEllipticArc(), nullptr);
  EXPECT_NEAR(lengthOf(stretched), 255.26998863398128, 1e-11);
  const Drawing undone =
      whole("<g transform='scale(5 3)'><circle r='10' transform='scale(.2 .333333333333333333)'/></g>");
  EXPECT_NE(undone.curves[0].curve.asArc(), nullptr);
}

TEST(SvgPage, TurnsYUpwardsFromTheLowerEdge) {
  const curve::Box box = boxOf(whole("<rect x='10' y='5' width='20' height='30'/>"));
  expectPoint(box.low, {10, 65});
  expectPoint(box.high, {30, 95});
}

TEST(SvgPage, KnowsThePhysicalUnits) {
  const struct {
    const char* size;
    const char* unit;
    double millimetres;
  } cases[] = {{"100mm", "mm", 100.0}, {"10cm", "cm", 100.0}, {"4in", "in", 101.6}, {"96px", "px", 25.4},
               {"72pt", "pt", 25.4},   {"6pc", "pc", 25.4},   {"40Q", "Q", 10.0},   {"96", "px", 25.4}};
  for (const auto& one : cases) {
    const std::string size = one.size;
    auto drawing = read("<svg xmlns='http://www.w3.org/2000/svg' width='" + size + "' height='" + size +
                        "' viewBox='0 0 10 10'><path d='M0 0h10'/></svg>");
    ASSERT_TRUE(drawing.ok()) << size;
    EXPECT_EQ(drawing->unitName, one.unit);
    EXPECT_NEAR(lengthOf(*drawing) * *drawing->millimetresPerUnit, one.millimetres, 1e-12) << size;
    EXPECT_EQ(drawing->warnings.empty(), one.unit != std::string("px"));
  }
}

// 1 mm = 3.77952755905512 px (CSS: 96 px an inch).
TEST(SvgPage, ReadsLengthsInsideInTheirOwnUnits) {
  auto drawing = read("<svg xmlns='http://www.w3.org/2000/svg'><line x2='1mm' stroke='#000'/></svg>");
  ASSERT_TRUE(drawing.ok());
  EXPECT_NEAR(lengthOf(*drawing), 3.77952755905512, 1e-14);
  const curve::Box box = boxOf(whole("<rect x='25%' y='50%' width='50%' height='10%'/>"));
  expectPoint(box.low, {50, 40});
  expectPoint(box.high, {150, 50});
  // The diagonal share of a radius: sqrt((200^2 + 100^2) / 2) = 158.113883008419 (SVG 2, 8.9).
  EXPECT_NEAR(lengthOf(whole("<circle r='10%'/>")), 2 * kPi * 15.8113883008419, 1e-12);
}

TEST(SvgPage, FitsTheViewBoxAsPreserveAspectRatioSays) {
  const auto boxWith = [](const char* fit) {
    auto drawing = read(std::string("<svg xmlns='http://www.w3.org/2000/svg' width='200mm' height='100mm' "
                                    "viewBox='5 5 10 10' preserveAspectRatio='") +
                        fit + "'><rect x='5' y='5' width='10' height='10'/></svg>");
    EXPECT_TRUE(drawing.ok());
    return boxOf(*drawing);
  };
  expectPoint(boxWith("xMidYMid").low, {50, 0});
  expectPoint(boxWith("xMinYMid meet").low, {0, 0});
  expectPoint(boxWith("xMaxYMax").high, {200, 100});
  expectPoint(boxWith("none").high, {200, 100});
  expectPoint(boxWith("none").low, {0, 0});
  expectPoint(boxWith("xMidYMin slice").high, {200, 100});
  expectPoint(boxWith("xMidYMin slice").low, {0, -100});
}

TEST(SvgTransforms, NestFromTheOutside) {
  const Drawing drawing = whole(
      "<g transform='translate(10,20)'><g transform='rotate(90)'><path "
      "transform='matrix(2 0 0 3 1 1) skewX(45)' d='M1 1 L2 2'/></g></g>");
  // skewX: (2, 1), (4, 2); matrix: (5, 4), (9, 7); turned: (-4, 5), (-7, 9); moved: (6, 25), (3, 29); y up.
  expectPoint(drawing.curves[0].curve.startPoint(), {6, 75});
  expectPoint(drawing.curves[0].curve.endPoint(), {3, 71});
}

TEST(SvgTransforms, AreReadAsCssWritesThem) {
  const Drawing drawing =
      whole("<path style='transform: translate(10px, 5px) rotate(0.25turn)' d='M0 0L1 0'/>");
  expectPoint(drawing.curves[0].curve.endPoint(), {10, 94});
  EXPECT_FALSE(svg::parseTransform("rotate(1,2)").has_value());
  EXPECT_FALSE(svg::parseTransform("translate(1").has_value());
  EXPECT_FALSE(svg::parseTransform("wobble(1)").has_value());
  EXPECT_FALSE(svg::parseTransform("scale(1e300) scale(1e300)").has_value());
}

TEST(SvgNestedSvg, HasItsOwnViewport) {
  const curve::Box box =
      boxOf(whole("<svg x='20' y='10' width='50%' height='40' viewBox='0 0 5 2'>"
                  "<rect width='100%' height='100%'/></svg>"));
  expectPoint(box.low, {20, 50});
  expectPoint(box.high, {120, 90});
}

TEST(SvgUse, PlacesSymbolsAndShapes) {
  const Drawing drawing = whole(
      "<defs><circle id='c' r='5'/><symbol id='s' viewBox='0 0 10 10'><rect width='10' "
      "height='10'/></symbol></defs>"
      "<use href='#c' x='20' y='30'/><use xlink:href='#s' x='100' width='40' height='40'/>");
  ASSERT_EQ(drawing.curves.size(), 5U);
  expectPoint(drawing.curves[0].curve.asArc()->centre, {20, 70});
  curve::Box box;
  for (std::size_t i = 1; i < 5; ++i) box.include(drawing.curves[i].curve.bounds());
  expectPoint(box.low, {100, 60});
  expectPoint(box.high, {140, 100});
}

TEST(SvgUse, RefusesLoopsOutsideAndExplosions) {
  auto loop = read(page("<g id='a'><use href='#a'/></g>"));
  ASSERT_TRUE(loop.ok());
  ASSERT_EQ(loop->skipped.size(), 1U);
  EXPECT_EQ(loop->skipped[0].firstPlace, "line 2");
  auto two =
      read(page("<defs><g id='a'><use href='#b'/></g><g id='b'><use href='#a'/></g></defs><use href='#a'/>"));
  ASSERT_TRUE(two.ok());
  EXPECT_EQ(two->skipped.size(), 1U);
  EXPECT_THAT(read(page("<use href='other.svg#x'/>")).error().message, HasSubstr("outside the drawing"));
  std::string bomb = "<defs><path id='u0' d='M0 0h1'/>";
  for (int i = 1; i < 30; ++i) {
    bomb += "<g id='u" + std::to_string(i) + "'>";
    for (int j = 0; j < 10; ++j) bomb += "<use href='#u" + std::to_string(i - 1) + "'/>";
    bomb += "</g>";
  }
  ReadOptions options;
  options.maxCurves = 10'000;
  auto many = read(page(bomb + "</defs><use href='#u29'/>"), options);
  ASSERT_FALSE(many.ok());
  EXPECT_EQ(many.error().code, ErrorCode::unsupported);
}

TEST(SvgStyle, LeavesOutWhatIsNotShown) {
  const Drawing drawing = whole(
      "<style>.gone { display: none } g > .dim { visibility: hidden } #x.y { fill: none; } path { stroke: "
      "none } "
      "rect.lines { fill: none; stroke: black !important }</style>"
      "<path class='a gone' d='M0 0h1'/><g><path class='dim' d='M0 0h2'/></g>"
      "<g visibility='hidden'><path d='M0 0h3'/><path visibility='visible' d='M0 0h4'/></g>"
      "<path id='x' class='y' d='M0 0h5'/><g display='none'><path style='display:inline' d='M0 0h6'/></g>"
      "<rect class='lines' style='stroke:none' width='1' height='1'/>"
      "<path style='fill:none;stroke:#123' d='M0 0h7'/>");
  ASSERT_EQ(drawing.curves.size(), 6U);
  EXPECT_NEAR(lengthOf(drawing), 4.0 + 4.0 + 7.0, 1e-12);
  std::size_t count = 0;
  for (const Skipped& row : drawing.ignored) count += row.count;
  EXPECT_EQ(count, 5U);
}

TEST(SvgStyle, AsksWhenARuleIsNotUnderstood) {
  auto drawing = read(page("<style>path[d]:nth-child(2) { display: none }</style><path d='M0 0h1'/>"));
  ASSERT_TRUE(drawing.ok());
  ASSERT_EQ(drawing->skipped.size(), 1U);
  EXPECT_EQ(drawing->skipped[0].kind, "style rule");
  EXPECT_TRUE(read(page("<style>a:hover { fill: none } text { font: x }</style><path d='M0 0h1'/>"))
                  ->skipped.empty());
}

TEST(SvgContent, OfClipsMasksPatternsAndMarkersIsNoGeometry) {
  const Drawing drawing = whole(
      "<clipPath id='c'><rect width='9' height='9'/></clipPath><mask><path d='M0 0h9'/></mask>"
      "<pattern><path d='M0 0h9'/></pattern><marker><path d='M0 0h9'/></marker><symbol><path d='M0 "
      "0h9'/></symbol>"
      "<path clip-path='url(#c)' d='M0 0h1'/>");
  EXPECT_EQ(drawing.curves.size(), 1U);
  ASSERT_EQ(drawing.warnings.size(), 1U);
  EXPECT_THAT(drawing.warnings[0], HasSubstr("1 element is clipped"));
}

TEST(SvgContent, ThatCannotBeFollowedIsReported) {
  auto drawing =
      read(page("<text>Rib 4</text><text> </text><image href='a.png' width='1' height='1'/>"
                "<path d='M0 0 L1'/><circle r='-1'/><rect width='2em' height='1'/>"
                "<polygon points='1 2 3'/><g transform='bend(2)'><path d='M0 0h1'/></g>"));
  ASSERT_TRUE(drawing.ok());
  EXPECT_TRUE(drawing->curves.empty());
  std::vector<std::string> kinds;
  for (const Skipped& row : drawing->skipped) kinds.push_back(row.kind);
  EXPECT_THAT(kinds, testing::ElementsAre("text", "path", "circle", "rect", "polygon", "g"));
  EXPECT_THAT(drawing->skipped[1].firstPlace, HasSubstr("line 2, where character 8"));
  ASSERT_EQ(drawing->ignored.size(), 1U);
  EXPECT_EQ(drawing->ignored[0].kind, "image");
}

TEST(SvgLayers, AreGroups) {
  const std::string text = page(
      "<g inkscape:groupmode='layer' inkscape:label='Ribs' id='layer1'><g id='inner'><path d='M0 "
      "0h1'/></g></g>"
      "<g id='b'><path d='M0 0h2'/></g><path d='M0 0h3'/>");
  auto drawing = read(text);
  ASSERT_TRUE(drawing.ok());
  EXPECT_THAT(drawing->layers, testing::ElementsAre("Ribs", "b"));
  ReadOptions options;
  options.layers = {"Ribs"};
  EXPECT_NEAR(lengthOf(*read(text, options)), 1.0, 1e-15);
}

TEST(SvgFile, MayHaveADoctypePrefixesAndOtherVocabularies) {
  auto drawing = read(
      "<?xml version='1.0' encoding='UTF-8' standalone='no'?>\n<!-- made by hand -->\n"
      "<!DOCTYPE svg PUBLIC \"-//W3C//DTD SVG 1.1//EN\" "
      "\"http://www.w3.org/Graphics/SVG/1.1/DTD/svg11.dtd\">\n"
      "<s:svg xmlns:s='http://www.w3.org/2000/svg' xmlns:o='urn:other'><o:path d='M0 0h5'/><s:path d='M0 "
      "0h2'/></s:svg>");
  ASSERT_TRUE(drawing.ok()) << drawing.error().message;
  EXPECT_NEAR(lengthOf(*drawing), 2.0, 1e-15);
}

TEST(SvgFile, IsRefusedWithItsReason) {
  const struct {
    std::string text;
    const char* reason;
  } cases[] = {
      {"<!DOCTYPE svg [<!ENTITY a 'b'>]><svg xmlns='http://www.w3.org/2000/svg'/>", "declares entities"},
      {"<?xml-stylesheet href='a.css'?><svg xmlns='http://www.w3.org/2000/svg'/>", "xml-stylesheet"},
      {page("<style>@import url(a.css);</style>"), "line 2: imports a style sheet"},
      {"\x1F\x8B\x08", "compressed"},
      {"<html/>", "begins with <html>"},
      {"", "no <svg> element"},
      {page("<g>"), "line 3: is not well-formed"},
      {page(std::string("<g>\0</g>", 8)), "zero byte"},
      {"<svg/><svg/>", "second element"},
      {"<svg viewBox='0 0 10'/>", "viewBox \"0 0 10\" is not understood"},
      {"<svg viewBox='0 0 0 1'/>", "no area"},
      {"<svg width='-3mm'/>", "not positive"},
      {"<svg width='3parsec'/>", "not understood"},
  };
  for (const auto& one : cases) {
    auto drawing = read(one.text);
    ASSERT_FALSE(drawing.ok()) << one.reason;
    EXPECT_THAT(drawing.error().message, HasSubstr(one.reason));
  }
  std::string deep;
  for (int i = 0; i < 100'000; ++i) deep += "<g>";
  for (int i = 0; i < 100'000; ++i) deep += "</g>";
  EXPECT_THAT(read(page(deep)).error().message, HasSubstr("deep"));
}

// Each proper prefix lacks the end of the root element, so none may be taken for a whole drawing.
TEST(SvgFile, CutAnywhereIsRefused) {
  const std::string text =
      "<?xml version=\"1.0\"?>\n" + page(
                                        "<!-- c --><style><![CDATA[ .a { fill: red } ]]></style>\n"
                                        "<g id='a'>\n<path class=\"a\" d='M0 0h1'/>\n<circle r='5'/></g>");
  const std::size_t end = text.rfind('>') + 1;
  ASSERT_TRUE(read(text.substr(0, end)).ok());
  for (std::size_t n = 0; n < end; ++n) EXPECT_FALSE(read(text.substr(0, n)).ok()) << n;
}

TEST(SvgSample, CutAnywhereIsRefused) {
  std::ifstream file(std::string(KF_SOURCE_DIR) + "/samples/name_board.svg", std::ios::binary);
  std::stringstream all;
  all << file.rdbuf();
  const std::string text = all.str();
  const std::size_t end = text.rfind('>') + 1;
  auto drawing = read(text.substr(0, end));
  ASSERT_TRUE(drawing.ok()) << drawing.error().message;
  EXPECT_TRUE(drawing->skipped.empty());
  EXPECT_EQ(drawing->unitName, "mm");
  for (std::size_t n = 0; n < end; ++n) EXPECT_FALSE(read(text.substr(0, n)).ok()) << n;
}

TEST(SvgFile, CanBeCancelled) {
  std::string text;
  for (int i = 0; i < 3000; ++i) text += "<path d='M0 0h1'/>";
  RunControl control;
  control.cancel();
  auto drawing = readSvg(page(text), "test.svg", {}, control);
  ASSERT_FALSE(drawing.ok());
  EXPECT_EQ(drawing.error().code, ErrorCode::cancelled);
}

}  // namespace
}  // namespace kf::read
