// The driven path: offset for the tool, blended joints, numbers of its parts.
// Lengths in mm.
#include <gtest/gtest.h>

#include <numbers>

#include "core/pipeline/pipeline.h"

namespace kf::pipeline {
namespace {

using contour::Contour;
using curve::Vec2;

Contour polygon(const std::vector<Vec2>& corners) {
  Contour c;
  c.name = "plate";
  c.closed = true;
  for (std::size_t i = 0; i < corners.size(); ++i)
    c.segments.push_back({curve::Line{corners[i], corners[(i + 1) % corners.size()]}, ""});
  return c;
}

Contour bone() {
  return polygon({{0, 0},
                  {20, 0},
                  {20, 8},
                  {40, 8},
                  {40, 0},
                  {60, 0},
                  {60, 20},
                  {40, 20},
                  {40, 12},
                  {20, 12},
                  {20, 20},
                  {0, 20}});
}

limits::Limits toolLimits(limits::Side side, double diameter) {
  limits::Limits limits;
  limits.feed = 50.0;
  limits.x = {200.0, 1000.0, {}};
  limits.y = limits.x;
  limits.side = side;
  limits.toolDiameter = diameter;
  return limits;
}

TEST(Drive, BlendsOnlyWithAToleranceAndWhenAskedTo) {
  RunControl control;
  auto limits = toolLimits(limits::Side::on, 6.0);
  const auto exact = prepareDriven(bone(), 1, limits, {}, control);
  ASSERT_TRUE(exact.ok());
  EXPECT_EQ((*exact)[0].drive->blended, 0u);
  limits.pathTolerance = 0.05;
  const auto blended = prepareDriven(bone(), 1, limits, {}, control);
  ASSERT_TRUE(blended.ok());
  EXPECT_EQ((*blended)[0].drive->blended, 11u) << "all corners but the start";
  EXPECT_LE((*blended)[0].drive->largestDeviation, 0.05);
  PlanOptions options;
  options.joints = plan::Joints::exact;
  EXPECT_EQ((*prepareDriven(bone(), 1, limits, options, control))[0].drive->blended, 0u);
  const auto faster = planContour((*blended)[0], limits, {}, false, control);
  const auto slower = planContour((*exact)[0], limits, {}, false, control);
  ASSERT_TRUE(faster.ok() && slower.ok());
  EXPECT_LT(faster->plan.time, slower->plan.time);
}

TEST(Drive, NumbersThePartsOfASplitContour) {
  RunControl control;
  std::vector<PreparedContour> all;
  for (int number : {1, 2}) {
    auto parts = prepareDriven(bone(), number, toolLimits(limits::Side::left, 6.0), {}, control);
    ASSERT_TRUE(parts.ok());
    EXPECT_EQ(parts->size(), 2u);
    EXPECT_FALSE((*parts)[0].drive->uncut.empty());
    EXPECT_TRUE((*parts)[1].drive->uncut.empty()) << "told once";
    for (auto& part : *parts) all.push_back(part);
  }
  numberParts(all, 2);
  EXPECT_EQ(all[0].facts.number, 1);
  EXPECT_EQ(all[1].facts.number, 3);
  EXPECT_EQ(all[2].facts.number, 2);
  EXPECT_EQ(all[3].facts.number, 4);
}

TEST(Drive, RefusesASideWithoutADiameterAndAToolThatFitsNowhere) {
  RunControl control;
  auto limits = toolLimits(limits::Side::left, 6.0);
  limits.toolDiameter.reset();
  const auto missing = prepareDriven(bone(), 1, limits, {}, control);
  ASSERT_FALSE(missing.ok());
  EXPECT_EQ(missing.error().code, ErrorCode::invalidArgument);
  EXPECT_EQ(prepareDriven(bone(), 1, toolLimits(limits::Side::left, 30.0), {}, control).error().code,
            ErrorCode::infeasible);
  PlanOptions options;
  options.refuseUncut = true;
  EXPECT_EQ(prepareDriven(bone(), 1, toolLimits(limits::Side::left, 3.0), options, control).error().code,
            ErrorCode::infeasible);
}

}  // namespace
}  // namespace kf::pipeline
