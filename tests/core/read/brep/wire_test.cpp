// The helper's answer: what is written comes back, and nothing else is believed.
// Lengths in mm.
#include "core/read/brep_wire.h"

#include <random>
#include <string>

#include <gtest/gtest.h>

namespace kf::read {
namespace {

Drawing example() {
  Drawing drawing;
  drawing.format = "STEP";
  drawing.layers = {"level 3"};
  drawing.warnings = {"flat in the plane z = 0 mm"};
  drawing.skipped = {{"edge", "an offset curve", 2, "edge 4"}};
  drawing.ignored = {{"IGES 212", "annotation", 1, "D5"}};
  drawing.curves.push_back({curve::Line{{1, 2}, {3, 4}}, "level 3", "edge 1"});
  drawing.curves.push_back({curve::Arc{{1, 2}, 3, 4, -5}, "", "edge 2"});
  drawing.curves.push_back({curve::EllipticArc{{1, 2}, {3, 0}, {1, 2}, 0.5, 6}, "", "edge 3"});
  auto spline = curve::makeNurbs(2, {0, 0, 0, 1, 1, 1}, {{1, 0}, {1, 1}, {0, 1}}, {1, 1, 2});
  drawing.curves.push_back({*spline, "", "edge 5"});
  return drawing;
}

TEST(HelpersAnswer, ComesBackAsItWas) {
  const Drawing drawing = example();
  const std::string bytes = encodeDrawing(drawing);
  auto again = decodeDrawing(bytes, 10);
  ASSERT_TRUE(again.ok()) << again.error().message;
  EXPECT_EQ(encodeDrawing(again), bytes);
  EXPECT_EQ(again->curves.size(), 4U);
  EXPECT_EQ(again->curves[3].curve.asNurbs()->weights, (std::vector<double>{1, 1, 2}));
  EXPECT_EQ(again->skipped[0].count, 2U);
  EXPECT_FALSE(decodeDrawing(bytes, 3).ok());
}

TEST(HelpersAnswer, CarriesAnError) {
  const Error error{ErrorCode::unsupported, "it is not flat"};
  auto again = decodeDrawing(encodeDrawing(error), 10);
  ASSERT_FALSE(again.ok());
  EXPECT_EQ(again.error().code, ErrorCode::unsupported);
  EXPECT_EQ(again.error().message, "it is not flat");
}

TEST(HelpersAnswer, CutAnywhereOrLongerIsRefused) {
  const std::string bytes = encodeDrawing(example());
  for (std::size_t n = 0; n < bytes.size(); ++n)
    EXPECT_FALSE(decodeDrawing(bytes.substr(0, n), 10).ok()) << n;
  EXPECT_FALSE(decodeDrawing(bytes + '\0', 10).ok());
}

// Whatever is changed, decoding ends, allocates no more than the answer's own size allows, and gives valid
// curves or an error. Meaningful above all under the sanitizers.
TEST(HelpersAnswer, DamagedAtRandomIsRefusedOrValid) {
  const std::string whole = encodeDrawing(example());
  std::mt19937_64 random(20240501);
  std::size_t refused = 0;
  for (int i = 0; i < 50'000; ++i) {
    std::string bytes = whole;
    const std::size_t changes = 1 + random() % 4;
    for (std::size_t j = 0; j < changes; ++j) bytes[random() % bytes.size()] = static_cast<char>(random());
    auto drawing = decodeDrawing(bytes, 10);
    if (!drawing) {
      ++refused;
      continue;
    }
    for (const auto& loose : drawing->curves) {
      const curve::Vec2 p = loose.curve.point(loose.curve.first());
      EXPECT_FALSE(std::isnan(p.x));
    }
  }
  EXPECT_GT(refused, 10'000U);
}

}  // namespace
}  // namespace kf::read
