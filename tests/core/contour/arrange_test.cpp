// Direction, start point, nesting and cutting order.
// Lengths in mm.
#include "core/contour/arrange.h"

#include <numbers>

#include <gmock/gmock.h>
#include <gtest/gtest.h>

namespace kf::contour {
namespace {

using curve::Arc;
using curve::Line;
using curve::Vec2;
using ::testing::ElementsAre;

constexpr double kPi = std::numbers::pi;

Contour circle(Vec2 centre, double radius, double sweep = 2 * kPi) {
  return {"", "", true, {{Arc{centre, radius, 0.3, sweep}, "CIRCLE"}}};
}

Contour square(Vec2 low, double side) {
  const Vec2 a = low, b{low.x + side, low.y}, c{low.x + side, low.y + side}, d{low.x, low.y + side};
  return {"", "", true, {{Line{a, b}, ""}, {Line{b, c}, ""}, {Line{c, d}, ""}, {Line{d, a}, ""}}};
}

// A plate with a hole, an island in the hole with a bore, and an open line beside them.
std::vector<Contour> plate() {
  return {square({0, 0}, 100),
          circle({50, 50}, 40),
          square({40, 40}, 20),
          circle({50, 50}, 5),
          {"", "", false, {{Line{{120, 0}, {130, 0}}, ""}}}};
}

TEST(Nesting, FindsHolesIslandsAndBores) {
  const auto nesting = nest(plate());
  EXPECT_FALSE(nesting[0].parent);
  EXPECT_EQ(nesting[1].parent, 0U);
  EXPECT_EQ(nesting[2].parent, 1U);
  EXPECT_EQ(nesting[3].parent, 2U);
  EXPECT_FALSE(nesting[4].parent);
  EXPECT_EQ(nesting[3].depth, 3U);
  // Inside the box of an L or a crescent is not inside the contour.
  Contour crescent{"",
                   "",
                   true,
                   {{Arc{{0, 0}, 50, kPi / 2, kPi}, ""},
                    {Arc{{0, 0}, 50, -kPi / 2, 0.2}, ""},
                    {Line{Vec2{50 * std::cos(-kPi / 2 + 0.2), 50 * std::sin(-kPi / 2 + 0.2)}, {-40, 0}}, ""},
                    {Line{{-40, 0}, {0, 50}}, ""}}};
  const auto apart = nest({crescent, circle({-10, -5}, 2)});
  EXPECT_FALSE(apart[1].parent);
}

TEST(Direction, ClimbKeepsTheMaterialOnTheRight) {
  const auto contours = plate();
  const auto nesting = nest(contours);
  for (std::size_t i = 0; i < 4; ++i) {
    const bool outline = i % 2 == 0;
    EXPECT_EQ(signedArea(directed(contours[i], nesting[i].depth, CutDirection::climb)) < 0.0, outline) << i;
    EXPECT_EQ(signedArea(directed(contours[i], nesting[i].depth, CutDirection::conventional)) > 0.0, outline)
        << i;
  }
  EXPECT_EQ(directed(contours[4], 0, CutDirection::climb).segments[0].curve.startPoint(), (Vec2{120, 0}));
}

TEST(StartPoint, MovesAlongAClosedContour) {
  const Contour c = square({0, 0}, 10);
  for (double s : {3.0, 10.0, 27.5, 39.999, 1e-15}) {
    const Contour moved = startedAt(c, s);
    EXPECT_NEAR(length(moved), 40.0, 1e-12) << s;
    EXPECT_NEAR(signedArea(moved), 100.0, 1e-9) << s;
    for (std::size_t i = 0; i < moved.segments.size(); ++i) {
      const Vec2 end = moved.segments[i].curve.endPoint();
      EXPECT_LT(curve::distance(end, moved.segments[(i + 1) % moved.segments.size()].curve.startPoint()),
                1e-12);
    }
  }
  EXPECT_EQ(startedAt(c, 10.0).segments.size(), 4U);
  EXPECT_EQ(startedAt(c, 3.0).segments.size(), 5U);
  EXPECT_EQ(startedAt(c, 3.0).segments.front().curve.startPoint(), (Vec2{3, 0}));
  const Contour ring = startedAt(circle({0, 0}, 10), 10.0);
  EXPECT_NEAR(ring.segments.front().curve.startPoint().x, 10 * std::cos(1.3), 1e-9);
}

TEST(CuttingOrder, PutsWhatIsInsideFirst) {
  const auto contours = plate();
  const auto nesting = nest(contours);
  RunControl control;
  EXPECT_THAT(*cutOrder(contours, nesting, CutOrder::asDrawn, control), ElementsAre(0, 1, 2, 3, 4));
  EXPECT_THAT(*cutOrder(contours, nesting, CutOrder::innerFirst, control), ElementsAre(3, 2, 1, 0, 4));
}

TEST(CuttingOrder, ShortestTravelGoesToTheNearestThatIsReady) {
  std::vector<Contour> contours;
  for (double x : {50.0, 10.0, 40.0, 20.0, 30.0}) contours.push_back(circle({x, 0}, 2));
  RunControl control;
  EXPECT_THAT(*cutOrder(contours, nest(contours), CutOrder::shortestTravel, control),
              ElementsAre(1, 3, 4, 2, 0));
  contours.push_back(square({-5, -5}, 100));  // around all of them, and nearest
  EXPECT_EQ(cutOrder(contours, nest(contours), CutOrder::shortestTravel, control)->back(), 5U);
  control.cancel();
  EXPECT_FALSE(cutOrder(contours, nest(contours), CutOrder::shortestTravel, control));
}

}  // namespace
}  // namespace kf::contour
