// Edges of real solids (gmsh-doc, where it is installed), each in a plane of its own, against the library's
// own arc length; and planes and images of curves in space. Lengths in mm.
#include "app/brep_reader/edges.h"

#include <BRepAdaptor_Curve.hxx>
#include <GCPnts_AbscissaPoint.hxx>

#include <unistd.h>

#include <cmath>
#include <cstdio>
#include <cstdlib>
#include <filesystem>
#include <numbers>
#include <string>

#include <gtest/gtest.h>

#include "app/brep_reader/load.h"
#include "core/curve/arc_length.h"

namespace kf::brep {
namespace {

struct Count {
  int edges = 0, flat = 0, rational = 0;
};

// Every edge is either flat, and then as long as the library says, or far from flat and told so.
Count compare(const std::string& path) {
  Count count;
  auto loaded = load(path, Format::step);
  EXPECT_TRUE(loaded.ok()) << (loaded.ok() ? "" : loaded.error().message);
  if (!loaded) return count;
  for (const LoadedShape& one : loaded->shapes) {
    for (const TopoDS_Edge& edge : edgesOf(one.shape)) {
      ++count.edges;
      auto curve = spaceCurveOf(edge);
      EXPECT_TRUE(curve.ok()) << (curve.ok() ? "" : curve.error().message);
      if (!curve) continue;
      const Plane plane = planeOf({*curve});
      if (plane.deviation > kFlat) continue;
      ++count.flat;
      auto image = flattened(*curve, plane);
      EXPECT_TRUE(image.ok()) << (image.ok() ? "" : image.error().message);
      if (!image) continue;
      if (image->asNurbs() != nullptr && !image->asNurbs()->weights.empty()) ++count.rational;
      const double theirs = GCPnts_AbscissaPoint::Length(BRepAdaptor_Curve(edge), 1e-12);
      EXPECT_NEAR(curve::totalLength(*image), theirs, 1e-9 * theirs) << path << " edge " << count.edges << " off its plane " << plane.deviation;
    }
  }
  return count;
}

// The file unpacked, or "" where the package is not installed.
std::string unpacked(const std::string& name) {
  const std::string source = "/usr/share/doc/gmsh-doc/doc/gmsh/" + name + ".gz";
  if (!std::filesystem::exists(source)) return {};
  const std::string target = (std::filesystem::temp_directory_path() /
                              std::filesystem::path("kf_" + std::to_string(getpid()) + ".step"))
                                 .string();
  return std::system(("gunzip -c " + source + " > " + target).c_str()) == 0 ? target : std::string();
}

class RealSolid : public testing::TestWithParam<const char*> {};

TEST_P(RealSolid, HasEdgesOfTheLengthsTheLibraryMeasures) {
  const std::string path = unpacked(GetParam());
  if (path.empty()) GTEST_SKIP() << "gmsh-doc is not installed";
  const Count count = compare(path);
  std::filesystem::remove(path);
  EXPECT_GT(count.edges, 0);
  EXPECT_GT(count.flat, count.edges / 2);
  std::printf("%s: %d edges, %d flat, %d of them rational splines\n", GetParam(), count.edges, count.flat,
              count.rational);
  if (std::string(GetParam()).find("as1") != std::string::npos) {
    EXPECT_GT(count.rational, 0);
  }
}
INSTANTIATE_TEST_SUITE_P(GmshDoc, RealSolid,
                         testing::Values("tutorial/t20_data.step", "demos/boolean/component8.step",
                                         "demos/boolean/as1-tu-203.stp",
                                         "demos/api/step_boundary_colors.stp"));

TEST(PlaneOfCurves, PrefersTheAxesPlanes) {
  const SpaceCurve front = SpaceLine{{1, 5, 2}, {4, 5, 9}}, more = SpaceLine{{1, 5, 2}, {7, 5, 2}};
  const Plane plane = planeOf({front, more});
  EXPECT_EQ(plane.text, "y = 5 mm");
  EXPECT_EQ(plane.deviation, 0.0);
  const auto image = flattened(front, plane);
  ASSERT_TRUE(image.ok());
  EXPECT_EQ(image->endPoint(), (curve::Vec2{4, 9}));
}

// x + y + z = 3: each point's height is its distance (x + y + z - 3) / sqrt 3.
TEST(PlaneOfCurves, FindsATiltedPlaneAndTheDeviationFromIt) {
  const SpaceCurve a = SpaceLine{{3, 0, 0}, {0, 3, 0}}, b = SpaceLine{{0, 3, 0}, {0, 0, 3}};
  const Plane plane = planeOf({a, b});
  EXPECT_NEAR(plane.deviation, 0.0, 1e-15);
  EXPECT_NEAR(plane.normal.x, 1.0 / std::sqrt(3.0), 1e-15);
  EXPECT_NEAR(dot(plane.right, plane.up), 0.0, 1e-15);
  const Plane off = planeOf({a, b, SpaceLine{{1, 1, 1}, {1.1, 1.1, 1.1}}});
  EXPECT_NEAR(off.deviation, 0.3 / std::sqrt(3.0), 1e-14);
}

// The circle's highest point lies between its samples: centre height 0, so r sin(tilt).
TEST(PlaneOfCurves, MeasuresAConicExactly) {
  const double tilt = 0.01;
  const SpaceConic circle{
      {0, 0, 0},
      {10 * std::cos(tilt) * std::cos(0.1), 10 * std::sin(0.1), 10 * std::sin(tilt) * std::cos(0.1)},
      {-10 * std::cos(tilt) * std::sin(0.1), 10 * std::cos(0.1), -10 * std::sin(tilt) * std::sin(0.1)},
      0.0,
      2 * std::numbers::pi};
  const std::vector<SpaceCurve> curves = {circle, SpaceLine{{-100, -100, 0}, {100, -100, 0}},
                                          SpaceLine{{0, 100, 0}, {0, 0, 0}}};
  EXPECT_NEAR(planeOf(curves).deviation, 10 * std::sin(tilt), 1e-12);
}

TEST(PlaneOfCurves, TakesTheMostLevelOneForASingleLine) {
  const Plane plane = planeOf({SpaceLine{{0, 0, 0}, {1, 1, 1}}});
  EXPECT_NEAR(plane.deviation, 0.0, 1e-15);
  EXPECT_NEAR(plane.normal.z, std::sqrt(2.0 / 3.0), 1e-15);
}

TEST(FlattenedConic, KeepsItsDirectionSeenFromEitherSide) {
  const SpaceCurve seenFromBelow = SpaceConic{{0, 0, 0}, {5, 0, 0}, {0, -5, 0}, 0.25, 1.0};
  const auto image = flattened(seenFromBelow, planeOf({seenFromBelow}));
  ASSERT_TRUE(image.ok());
  ASSERT_NE(image->asArc(), nullptr);
  EXPECT_EQ(image->asArc()->sweep, -1.0);
  EXPECT_NEAR(image->startPoint().y, -5 * std::sin(0.25), 1e-15);
  EXPECT_FALSE(flattened(SpaceConic{{0, 0, 0}, {5, 0, 0}, {5, 0, 0}, 0.0, 1.0}, Plane{}).ok());
}

}  // namespace
}  // namespace kf::brep
