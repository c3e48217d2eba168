// The document and its tables without any window: choices, undo, joints, spots.
// mm, s; limits in the file's units.
#include <gtest/gtest.h>

#include <QSignalSpy>

#include "ui/models/table_models.h"

namespace kf::ui {
namespace {

QString sample(const char* name) {
  return QStringLiteral(KF_SOURCE_DIR "/samples/") + QLatin1String(name);
}

class OpenDocument : public ::testing::Test {
 protected:
  void open(const char* name) {
    ASSERT_TRUE(document.loadLimits(sample("limits/example-router.json")));
    document.setLaw(plan::Law::acceleration);
    document.undoStack().clear();
    waitForPlans([&] { document.open(sample(name), {}); });
    ASSERT_NE(document.plan(), nullptr) << document.planError().toStdString();
  }

  // Runs `change` and waits until the plans that follow from it are there.
  template <class Change>
  void waitForPlans(Change change) {
    QSignalSpy planned(&document, &Document::plansChanged);
    change();
    while (planned.isEmpty() || document.isPlanning()) ASSERT_TRUE(planned.wait(20'000));
  }

  const limits::Field& field(const char* name) { return *limits::findField(name); }

  Document document;
};

TEST_F(OpenDocument, MergesOneDragAndPartsTwo) {
  open("gasket.dxf");
  const double before = document.totalTime();
  for (double feed : {8000.0, 7000.0, 6000.0}) document.setField(field("path.feed_mm_per_min"), feed);
  document.endGesture();
  const double between = document.totalTime();
  for (double feed : {5000.0, 4000.0}) document.setField(field("path.feed_mm_per_min"), feed);
  EXPECT_EQ(document.undoStack().count(), 2);
  document.undoStack().undo();
  EXPECT_DOUBLE_EQ(document.totalTime(), between);
  document.undoStack().undo();
  EXPECT_DOUBLE_EQ(document.totalTime(), before);
  document.undoStack().redo();
  EXPECT_DOUBLE_EQ(document.totalTime(), between);
}

TEST_F(OpenDocument, RefusesAValueThatIsNoLimit) {
  open("gasket.dxf");
  document.setField(field("path.feed_mm_per_min"), -5.0);
  document.setField(field("tool.teeth"), 2.5);
  EXPECT_EQ(document.undoStack().count(), 0);
  EXPECT_DOUBLE_EQ(*document.limits().feed, 150.0);
}

TEST_F(OpenDocument, KnowsWhetherTheLimitsAreSaved) {
  open("gasket.dxf");
  EXPECT_TRUE(document.limitsAreSaved());
  document.setField(field("path.feed_mm_per_min"), 5000.0);
  EXPECT_FALSE(document.limitsAreSaved());
  document.undoStack().undo();
  EXPECT_TRUE(document.limitsAreSaved());
  document.confirmLimitsAreMine();
  EXPECT_FALSE(document.limits().example);
  EXPECT_FALSE(document.limitsAreSaved());
}

TEST_F(OpenDocument, StopsAtCornersThatAreKeptExact) {
  open("name_board.dxf");
  const double blended = document.totalTime();
  waitForPlans([&] { document.setJoints(plan::Joints::exact); });
  EXPECT_GT(document.totalTime(), blended + 0.05);
  waitForPlans([&] { document.undoStack().undo(); });
  EXPECT_DOUBLE_EQ(document.totalTime(), blended);
}

TEST_F(OpenDocument, KeepsASingleJointExactByItsTick) {
  open("name_board.dxf");
  JointModel joints(document);
  ASSERT_EQ(joints.rowCount(), 2);
  const double both = document.plan()->plan.time;
  ASSERT_TRUE(joints.placeOf(0));
  EXPECT_NEAR(*joints.placeOf(0), 160.47, 1.0);
  waitForPlans([&] { joints.setData(joints.index(0, 4), Qt::Unchecked, Qt::CheckStateRole); });
  EXPECT_EQ(joints.data(joints.index(0, 4), Qt::CheckStateRole).toInt(), Qt::Unchecked);
  EXPECT_EQ(joints.data(joints.index(1, 4), Qt::CheckStateRole).toInt(), Qt::Checked);
  EXPECT_GT(document.plan()->plan.time, both + 0.02);
  waitForPlans([&] { document.undoStack().undo(); });
  EXPECT_DOUBLE_EQ(document.plan()->plan.time, both);
}

TEST_F(OpenDocument, ListsTightSpotsWorstFirstAndFindsThemByPlace) {
  open("gasket.dxf");
  SpotModel spots(document);
  ASSERT_GT(spots.rowCount(), 2);
  for (int row = 1; row < spots.rowCount(); ++row)
    EXPECT_GE(spots.spot(row - 1)->timeLost, spots.spot(row)->timeLost);
  const int found = spots.rowAt(spots.spot(1)->s);
  ASSERT_GE(found, 0);
  EXPECT_LE(spots.spot(found)->from, spots.spot(1)->s);
  EXPECT_GE(spots.spot(found)->to, spots.spot(1)->s);
  EXPECT_EQ(spots.rowAt(-1.0), -1);
  EXPECT_EQ(spots.asText().count(u'\n'), spots.rowCount() + 1);
  EXPECT_EQ(spots.spot(spots.rowCount()), nullptr);
}

TEST_F(OpenDocument, ShowsTheOffsetPathOnTheToolsSide) {
  open("gasket.dxf");
  const double onTheLine = document.plan()->facts.length;
  waitForPlans([&] { document.setSide(limits::Side::left); });
  ASSERT_NE(document.plan(), nullptr) << document.planError().toStdString();
  // A closed convex outline, run clockwise, grows by the tool's circumference on its left.
  EXPECT_NEAR(document.plan()->facts.length - onTheLine, 6.0 * 3.14159265, 0.1);
}

TEST_F(OpenDocument, KeepsThePlansOfOtherContoursWhenOneHasNone) {
  open("gasket.dxf");
  limits::Limits unusable = document.limits();
  unusable.feed.reset();
  document.setLimits(unusable, {});
  EXPECT_FALSE(document.planError().isEmpty());
  EXPECT_EQ(document.contourCount(), 8);
  EXPECT_EQ(document.plan(), nullptr);
  document.undoStack().undo();
  EXPECT_TRUE(document.planError().isEmpty());
  EXPECT_NE(document.plan(), nullptr);
}

TEST_F(OpenDocument, ForgetsTheStretchWithTheContour) {
  open("gasket.dxf");
  document.setCursor(12.0);
  document.setStretch(std::pair(5.0, 20.0));
  document.choose(2);
  EXPECT_FALSE(document.stretch());
  EXPECT_FALSE(document.cursor());
  document.undoStack().undo();
  EXPECT_EQ(document.chosen(), 0);
}

}  // namespace
}  // namespace kf::ui
