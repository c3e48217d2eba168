// Point lists: dialects, headers, contours, refusals.
// Lengths in the file's own unit.
#include <gmock/gmock.h>
#include <gtest/gtest.h>

#include "core/read/drawing.h"

namespace kf::read {
namespace {

using ::testing::HasSubstr;

Result<Drawing> tryRead(const std::string& text) {
  RunControl control;
  return readCsvPoints(text, "a.csv", {}, control);
}

std::vector<curve::Vec2> pointsOf(const std::string& text) {
  std::vector<curve::Vec2> points;
  const auto drawing = tryRead(text);
  EXPECT_TRUE(drawing) << drawing.error().message;
  if (!drawing) return points;
  for (const auto& loose : drawing->curves) {
    if (!loose.follows) points.push_back(loose.curve.startPoint());
    points.push_back(loose.curve.endPoint());
  }
  return points;
}

std::string refusal(const std::string& text) {
  const auto drawing = tryRead(text);
  return drawing ? "accepted" : drawing.error().message;
}

TEST(CsvPoints, AreReadInEveryDialect) {
  const std::vector<curve::Vec2> wanted = {{0.5, 1.0}, {2.25, -3.0}, {1e3, 4.0}};
  for (const char* text :
       {"0.5,1\n2.25,-3\n1e3,4\n", "0.5, 1\r\n2.25, -3\r\n1e3, 4", "0,5;1\n2,25;-3\n1000;4\n",
        "0.5;1\n2.25;-3\n1000;4\n", "0,5\t1\n2,25\t-3\n1000\t4\n", "0.5 1\n 2.25   -3\n1000 4\n",
        "\xEF\xBB\xBFx,y\n0.5,1\n2.25,-3\n1000,4\n", "# note\nY;X\n1;0,5\n-3;2,25\n4;1000\n",
        "\"x\",\"y\"\n\"0.5\",\"1\"\n\"2.25\",\"-3\"\n\"1000\",\"4\"\n"}) {
    EXPECT_EQ(pointsOf(text), wanted) << text;
  }
}

TEST(CsvPoints, TakeTheirUnitFromTheHeader) {
  EXPECT_DOUBLE_EQ(*tryRead("x_mm,y_mm\n0,0\n1,1\n")->millimetresPerUnit, 1.0);
  EXPECT_DOUBLE_EQ(*tryRead("X [in];Y [in]\n0;0\n1;1\n")->millimetresPerUnit, 25.4);
  EXPECT_FALSE(tryRead("x,y\n0,0\n1,1\n")->millimetresPerUnit);
  EXPECT_THAT(refusal("x_mm,y_in\n0,0\n1,1\n"), HasSubstr("different units"));
}

TEST(CsvPoints, ABlankLineOrTheContourColumnBeginsAnother) {
  for (const char* text :
       {"0,0\n1,0\n\n5,5\n6,5\n7,5\n", "contour,x,y\n1,0,0\n1,1,0\n2,5,5\n2,6,5\n2,7,5\n"}) {
    const auto d = tryRead(text);
    ASSERT_TRUE(d) << d.error().message;
    ASSERT_EQ(d->curves.size(), 3U);
    EXPECT_FALSE(d->curves[0].follows);
    EXPECT_FALSE(d->curves[1].follows);
    EXPECT_TRUE(d->curves[2].follows);
  }
}

// The program's own list: columns beyond x and y say how it is driven, and are not needed here.
TEST(CsvPoints, OfTheProgramsOwnListComeBack) {
  const auto d = tryRead(
      "# made by hand\ncontour,s_mm,t_s,x_mm,y_mm,feed_mm_per_min,acceleration_mm_per_s2,jerk_mm_per_s3,"
      "curvature_per_mm,limited_by\n1,0,0,3,4,0,0,0,0,stop\n1,5,1,6,8,100,0,0,0,feed\n");
  ASSERT_TRUE(d) << d.error().message;
  ASSERT_EQ(d->curves.size(), 1U);
  EXPECT_EQ(d->curves[0].curve.endPoint(), (curve::Vec2{6.0, 8.0}));
}

TEST(CsvPoints, RefuseWhatCanBeReadInTwoWays) {
  EXPECT_THAT(refusal("1,5,2,5\n3,5,4,5\n"), HasSubstr("unclear"));
  EXPECT_THAT(refusal("1,5 2,5\n3,5 4,5\n"), HasSubstr("unclear"));
  EXPECT_THAT(refusal("0,5,1\n2,5,3\n"), HasSubstr("unclear"));
  EXPECT_THAT(refusal("x,y\n1,5,2,5\n"), HasSubstr("4 columns, where the first line has 2"));
  EXPECT_THAT(refusal("0,0\n1,5,2,5\n"), HasSubstr("line 2: 4 columns"));
  EXPECT_THAT(refusal("1,5;2.5\n"), HasSubstr("mixed"));
  EXPECT_THAT(refusal("1.5;2\n2,5;3\n"), HasSubstr("line 2: decimal points and decimal commas are mixed"));
}

TEST(CsvPoints, RefuseWhatIsNoNumber) {
  EXPECT_THAT(refusal("0,0\n1,one\n"), HasSubstr("a.csv line 2: 'one' is not a number"));
  EXPECT_THAT(refusal("0,0\nnan,1\n"), HasSubstr("not a number"));
  EXPECT_THAT(refusal("0,0\n1e999,1\n"), HasSubstr("not a number"));
  EXPECT_THAT(refusal("0,0\n1e300,1\n"), HasSubstr("out of range"));
  EXPECT_THAT(refusal("length,width\n1,2\n"), HasSubstr("neither two numbers nor a header"));
  EXPECT_THAT(refusal("0,0\n1\n"), HasSubstr("needs an x and a y"));
  EXPECT_THAT(refusal("3,3\n3,3\n"), HasSubstr("no two different points"));
}

TEST(CsvPoints, ThatSayTheirNumberAreRefusedWhenCutShort) {
  EXPECT_EQ(pointsOf("# points 2\n0,0\n1,12\n").size(), 2U);
  EXPECT_THAT(refusal("# points 3\n0,0\n1,1\n"), HasSubstr("with 2 points, although it says 3"));
  EXPECT_THAT(refusal("# points 2\n0,0\n1,1"), HasSubstr("get a whole copy"));
}

TEST(CsvPoints, ARowThatRepeatsOrStandsAloneIsReported) {
  const auto d = tryRead("0,0\n1,0\n1,0\n\n9,9\n");
  ASSERT_TRUE(d);
  ASSERT_EQ(d->ignored.size(), 1U);
  EXPECT_EQ(d->ignored[0].firstPlace, "line 3");
  ASSERT_EQ(d->skipped.size(), 1U);
  EXPECT_EQ(d->skipped[0].reason, "it stands alone");
}

}  // namespace
}  // namespace kf::read
