// Numbers as people read them, and thinning of curves for the screen.
// mm, s.
#include <gtest/gtest.h>

#include <algorithm>
#include <cmath>
#include <limits>

#include "ui/format/units.h"
#include "ui/plot/decimate.h"

namespace kf::ui {
namespace {

TEST(NumbersWithUnits, FollowTheChosenUnit) {
  EXPECT_EQ(lengthText(25.4, Units::mm), "25.400 mm");
  EXPECT_EQ(lengthText(25.4, Units::inch), "1.0000 in");
  EXPECT_EQ(feedText(100.0, Units::mm), "6000 mm/min");
  EXPECT_EQ(feedText(25.4, Units::inch), "60.0 in/min");
  EXPECT_EQ(radiusNumber(0.0, Units::mm), "corner");
  EXPECT_EQ(radiusNumber(std::numeric_limits<double>::infinity(), Units::mm), "straight");
  EXPECT_EQ(timeText(12.3456), "12.346 s");
  EXPECT_EQ(timeText(184.25), "3 min 04.3 s");
  EXPECT_EQ(shownUnit(u"mm/s^2", Units::inch), QStringLiteral("in/s\u00B2"));
}

TEST(ThinnedCurve, KeepsEveryPeakAndTheOrder) {
  std::vector<double> x, y;
  for (int i = 0; i < 100'000; ++i) {
    x.push_back(i);
    y.push_back(std::sin(0.001 * i));
  }
  y[54'321] = 7.0;
  y[12'345] = -9.0;
  const Thinned thin = thinned(x, y, 0.0, 1e5, 500);
  EXPECT_LE(thin.x.size(), 2010U);
  EXPECT_EQ(*std::max_element(thin.y.begin(), thin.y.end()), 7.0);
  EXPECT_EQ(*std::min_element(thin.y.begin(), thin.y.end()), -9.0);
  EXPECT_TRUE(std::is_sorted(thin.x.begin(), thin.x.end()));
  EXPECT_EQ(thin.x.front(), 0.0);
  EXPECT_EQ(thin.x.back(), 99'999.0);
}

}  // namespace
}  // namespace kf::ui
