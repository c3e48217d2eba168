// Reading, writing, and refusing limits files.
// Units as the file's keys say.
#include "core/limits/limits.h"

#include <gmock/gmock.h>
#include <gtest/gtest.h>

namespace kf::limits {
namespace {

using ::testing::HasSubstr;

constexpr const char* kRouter = R"({ "format": "kappafeed-limits", "version": 1, "name": "Bench router",
  "axes": { "X": { "speed_mm_per_min": 18000, "acceleration_mm_per_s2": 1500, "jerk_mm_per_s3": 30000 },
            "Y": { "speed_mm_per_min": 15000, "acceleration_mm_per_s2": 1200, "jerk_mm_per_s3": 24000 } },
  "path": { "feed_mm_per_min": 6000, "centripetal_acceleration_mm_per_s2": 900,
            "tangential_acceleration_mm_per_s2": 1500, "tangential_jerk_mm_per_s3": null },
  "control": { "path_tolerance_mm": 0.02, "chord_tolerance_mm": 0.005, "block_period_ms": 1.0,
               "lookahead_blocks": 200, "position_gain_per_s": null, "contour_error_mm": null },
  "tool": { "diameter_mm": 6.0, "side": "on", "teeth": 2, "spindle_rpm": 18000, "feed_per_tooth_mm": null,
            "radial_depth_mm": null } })";

std::string refusal(const std::string& json) {
  const auto read = parseLimits(json, "a.json");
  return read ? "accepted" : read.error().message;
}

TEST(LimitsFile, IsReadInSiUnitsOfTheProgram) {
  const auto l = parseLimits(kRouter, "a.json");
  ASSERT_TRUE(l) << l.error().message;
  EXPECT_DOUBLE_EQ(*l->x.speed, 300.0);
  EXPECT_DOUBLE_EQ(*l->feed, 100.0);
  EXPECT_DOUBLE_EQ(*l->blockPeriod, 0.001);
  EXPECT_EQ(*l->lookaheadBlocks, 200);
  EXPECT_FALSE(l->tangentialJerk);
  EXPECT_EQ(l->side, Side::on);
  EXPECT_TRUE(validateForPlan(*l));
}

TEST(LimitsFile, ComesBackEqualFromItsOwnText) {
  auto l = parseLimits(kRouter, "a.json");
  ASSERT_TRUE(l);
  for (double odd : {17.3, 1e-3, 123456.789, 0.1}) {
    ASSERT_TRUE(checkValue(*findField("path.feed_mm_per_min"), odd));
    findField("path.feed_mm_per_min")->put(*l, odd);
    const auto again = parseLimits(toJson(*l), "b.json");
    ASSERT_TRUE(again) << again.error().message;
    EXPECT_EQ(*again, *l) << odd;
  }
  EXPECT_THAT(toJson(*l), HasSubstr("18000"));
}

TEST(LimitsFile, NamesTheNearestKeyWhenOneIsUnknown) {
  EXPECT_THAT(refusal(R"({"format":"kappafeed-limits","version":1,"path":{"feed_mm_per_minute":6}})"),
              HasSubstr("'path.feed_mm_per_min'"));
  EXPECT_THAT(refusal(R"({"format":"kappafeed-limits","version":1,"axis":{}})"), HasSubstr("'axes'"));
}

TEST(LimitsFile, RefusesNumbersThatAreNotPositive) {
  for (const char* bad : {"0", "-1", "1e999", "\"fast\"", "true", "[1]"}) {
    EXPECT_THAT(
        refusal(std::string(R"({"format":"kappafeed-limits","version":1,"path":{"feed_mm_per_min":)") + bad +
                "}}"),
        ::testing::AnyOf(HasSubstr("path.feed_mm_per_min"), HasSubstr("JSON")))
        << bad;
  }
  EXPECT_THAT(refusal(R"({"format":"kappafeed-limits","version":1,"tool":{"teeth":2.5}})"),
              HasSubstr("whole"));
}

TEST(LimitsFile, RefusesWhatIsNoLimitsFile) {
  EXPECT_THAT(refusal(""), HasSubstr("JSON"));
  EXPECT_THAT(refusal("[]"), HasSubstr("object"));
  EXPECT_THAT(refusal(R"({"format":"other","version":1})"), HasSubstr("kappafeed-limits"));
  EXPECT_THAT(refusal(R"({"format":"kappafeed-limits","version":2})"), HasSubstr("newer"));
  EXPECT_THAT(refusal(R"({"format":"kappafeed-limits","version":1,"name":"a","name":"b"})"),
              HasSubstr("twice"));
  EXPECT_FALSE(readLimitsFile("/nowhere/limits.json"));
  EXPECT_FALSE(readLimitsFile("/"));
}

TEST(SetByName, ChangesOneNumberAndChecksIt) {
  Limits l;
  EXPECT_TRUE(set(l, "axes.X.acceleration_mm_per_s2=1800"));
  EXPECT_DOUBLE_EQ(*l.x.acceleration, 1800.0);
  EXPECT_TRUE(set(l, "axes.X.acceleration_mm_per_s2=none"));
  EXPECT_FALSE(l.x.acceleration);
  EXPECT_TRUE(set(l, "tool.side=left"));
  EXPECT_EQ(l.side, Side::left);
  for (const char* bad : {"axes.X.acceleration_mm_per_s2", "axes.X.acceleration_mm_per_s2=1,5",
                          "axes.X.acceleration_mm_per_s2=-1", "axes.X.acceleration_mm_per_s2=nan",
                          "axes.X.acceleration_mm_per_s2=", "tool.side=up"}) {
    EXPECT_FALSE(set(l, bad)) << bad;
  }
  EXPECT_THAT(set(l, "axis.X.speed=1").error().message, HasSubstr("axes.X.speed_mm_per_min"));
}

TEST(ValidationForAPlan, AsksForFeedSpeedAndAcceleration) {
  auto l = parseLimits(kRouter, "a.json");
  ASSERT_TRUE(l);
  l->y.acceleration.reset();
  const auto valid = validateForPlan(*l);
  ASSERT_FALSE(valid);
  EXPECT_THAT(valid.error().message, HasSubstr("axes.Y.acceleration_mm_per_s2"));
}

}  // namespace
}  // namespace kf::limits
