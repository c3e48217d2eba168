// The real window: open, change a limit, undo, point at tight spots, export, read the file back.
// mm, s; limits in the file's units.
#include <gtest/gtest.h>

#include <QCheckBox>
#include <QComboBox>
#include <QDialog>
#include <QDoubleSpinBox>
#include <QDragEnterEvent>
#include <QDropEvent>
#include <QEventLoop>
#include <QFile>
#include <QLabel>
#include <QLineEdit>
#include <QMessageBox>
#include <QMimeData>
#include <QPushButton>
#include <QSignalSpy>
#include <QSlider>
#include <QTemporaryDir>
#include <QTest>
#include <QTimer>
#include <QUrl>
#include <functional>

#include "core/read/drawing.h"
#include "ui/canvas/canvas.h"
#include "ui/panels/summary_panel.h"
#include "ui/panels/tables.h"
#include "ui/plot/plot_pane.h"
#include "ui/window/main_window.h"

namespace kf::ui {
namespace {

QString sample(const char* name) {
  return QStringLiteral(KF_SOURCE_DIR "/samples/") + QLatin1String(name);
}

// Answers the next modal box, once it is there.
void whenModal(std::function<void(QWidget*)> answer) {
  auto* timer = new QTimer;
  QObject::connect(timer, &QTimer::timeout, timer, [timer, answer = std::move(answer)] {
    QWidget* box = QApplication::activeModalWidget();
    if (box == nullptr) return;
    timer->deleteLater();
    answer(box);
  });
  timer->start(1);
}

void press(QWidget* box, const char* name) {
  auto* button = box->findChild<QPushButton*>(QLatin1String(name));
  ASSERT_NE(button, nullptr) << name;
  button->click();
}

class Window : public ::testing::Test {
 protected:
  Window() : settings(dir.filePath("settings.ini")), window(document, settings) {
    window.resize(1400, 900);
    window.show();
    EXPECT_TRUE(document.loadLimits(sample("limits/example-router.json")));
    document.setLaw(plan::Law::acceleration);  // planned at once, not in the background
    document.undoStack().clear();
  }

  void open(const QString& path) {
    QSignalSpy planned(&document, &Document::plansChanged);
    window.openDrawing(path);
    ASSERT_TRUE(!planned.isEmpty() || planned.wait(20'000));
    ASSERT_NE(document.plan(), nullptr) << document.planError().toStdString();
  }

  QTemporaryDir dir;
  Settings settings;
  Document document;
  MainWindow window;
};

TEST_F(Window, SaysWhatToDoWhenNothingIsOpen) {
  EXPECT_TRUE(document.isEmpty());
  EXPECT_EQ(window.findChild<QLabel*>("lowerBound")->text(), "No drawing is open");
  const QImage picture = window.canvas().grab().toImage();
  int lit = 0;
  for (int x = 0; x < picture.width(); ++x) {
    for (int y = 0; y < picture.height(); ++y) lit += qGray(picture.pixel(x, y)) > 150 ? 1 : 0;
  }
  EXPECT_GT(lit, 100);  // words, not an empty ground
}

TEST_F(Window, ShowsEveryContourWithItsTime) {
  open(sample("gasket.dxf"));
  EXPECT_EQ(document.contourCount(), 8);
  EXPECT_GT(document.totalTime(), 1.0);
  EXPECT_LE(document.totalLowerBound(), document.totalTime());
  EXPECT_TRUE(window.findChild<QLabel*>("totalTime")->text().endsWith(" s"));
  EXPECT_EQ(window.findChild<ContourTable*>()->model()->rowCount(), 8);
}

TEST_F(Window, ReplansAtOnceWhenALimitChangesAndUndoesIt) {
  open(sample("gasket.dxf"));
  const double before = document.totalTime();
  const QString shown = window.findChild<QLabel*>("totalTime")->text();
  auto* feed = window.findChild<QDoubleSpinBox*>("path.feed_mm_per_min");
  ASSERT_NE(feed, nullptr);
  feed->setValue(3000.0);
  EXPECT_GT(document.totalTime(), before * 1.2);
  EXPECT_NE(window.findChild<QLabel*>("totalTime")->text(), shown);
  document.undoStack().undo();
  EXPECT_DOUBLE_EQ(document.totalTime(), before);
  EXPECT_DOUBLE_EQ(feed->value(), 9000.0);
}

TEST_F(Window, UndoesADragOfASliderInOneStep) {
  open(sample("gasket.dxf"));
  auto* slider = window.findChild<QSlider*>("path.feed_mm_per_min.slider");
  ASSERT_NE(slider, nullptr);
  const double before = document.totalTime();
  slider->setSliderDown(true);
  for (int i = 1; i <= 20; ++i) slider->setSliderPosition(slider->value() - 10);
  slider->setSliderDown(false);
  EXPECT_GT(document.totalTime(), before);
  EXPECT_EQ(document.undoStack().count(), 1);
  document.undoStack().undo();
  EXPECT_DOUBLE_EQ(document.totalTime(), before);
}

TEST_F(Window, SwitchesALimitOffAndOnAgain) {
  open(sample("gasket.dxf"));
  auto* on = window.findChild<QCheckBox*>("path.centripetal_acceleration_mm_per_s2.on");
  ASSERT_NE(on, nullptr);
  const double before = document.totalTime();
  on->click();
  EXPECT_FALSE(document.limits().centripetalAcceleration);
  EXPECT_LT(document.totalTime(), before);
  on->click();
  EXPECT_DOUBLE_EQ(*document.limits().centripetalAcceleration, 600.0);
  EXPECT_DOUBLE_EQ(document.totalTime(), before);
}

TEST_F(Window, ShowsATightSpotInCanvasAndPlot) {
  open(sample("gasket.dxf"));
  ASSERT_GT(window.spots().spots().rowCount(), 0);
  const double wholeWidth = window.plot().rangeHigh() - window.plot().rangeLow();
  const QRect cell = window.spots().visualRect(window.spots().spots().index(0, 1));
  QTest::mouseClick(window.spots().viewport(), Qt::LeftButton, {}, cell.center());
  const pipeline::TightSpot& spot = document.plan()->tightSpots.front();
  ASSERT_TRUE(document.cursor());
  EXPECT_DOUBLE_EQ(*document.cursor(), spot.s);
  const QPointF at = window.canvas().toScreen(spot.x, spot.y);
  EXPECT_NEAR(at.x(), 0.5 * window.canvas().width(), 1.0);
  EXPECT_NEAR(at.y(), 0.5 * window.canvas().height(), 1.0);
  EXPECT_LT(window.plot().rangeHigh() - window.plot().rangeLow(), wholeWidth);
  EXPECT_LE(window.plot().rangeLow(), spot.s);
  EXPECT_GE(window.plot().rangeHigh(), spot.s);
  EXPECT_TRUE(window.readout().text().contains("Limited by"));
}

TEST_F(Window, LinksThePointerOnTheCanvasToTheCursor) {
  open(sample("gasket.dxf"));
  const path::Path& path = *document.plan()->path;
  const std::size_t i = path.size() / 3;
  QTest::mouseMove(&window.canvas(), window.canvas().toScreen(path.x[i], path.y[i]).toPoint());
  ASSERT_TRUE(document.cursor());
  EXPECT_NEAR(*document.cursor(), path.s[i], 1.0);
}

TEST_F(Window, ShowsInchesEverywhereAndBack) {
  open(sample("gasket.dxf"));
  document.setCursor(10.0);
  document.setUnits(Units::inch);
  EXPECT_TRUE(window.readout().text().contains("in/min"));
  EXPECT_NEAR(window.findChild<QDoubleSpinBox*>("path.feed_mm_per_min")->value(), 9000.0 / 25.4, 0.06);
  EXPECT_NEAR(window.plot().rangeHigh(), document.plan()->facts.length / 25.4, 1e-9);
  document.setUnits(Units::mm);
  EXPECT_DOUBLE_EQ(window.findChild<QDoubleSpinBox*>("path.feed_mm_per_min")->value(), 9000.0);
}

TEST_F(Window, ComparesWithAPinnedPlan) {
  open(sample("gasket.dxf"));
  document.pinReference();
  window.findChild<QDoubleSpinBox*>("path.feed_mm_per_min")->setValue(3000.0);
  EXPECT_TRUE(window.findChild<QLabel*>("comparison")->text().contains("longer by"));
  document.dropReference();
  EXPECT_TRUE(window.findChild<QLabel*>("comparison")->isHidden());
}

TEST_F(Window, PricesArriveFromTheBackground) {
  open(sample("gasket.dxf"));
  QSignalSpy priced(&document, &Document::pricesChanged);
  while (document.prices().empty() && priced.wait(20'000)) {
  }
  ASSERT_FALSE(document.prices().empty());
  EXPECT_GT(document.prices().front().timeSaved, 0.0);
}

TEST_F(Window, AsksForTheUnitOfADrawingThatDoesNotSay) {
  whenModal([](QWidget* box) { press(box, "inches"); });
  open(sample("oar_blade.dxf"));
  EXPECT_NEAR(document.drawing()->bounds.width(), 640.0 * 25.4, 1.0);
}

TEST_F(Window, AsksBeforeItLeavesEntitiesOut) {
  const QString path = dir.filePath("odd.dxf");
  QFile file(path);
  ASSERT_TRUE(file.open(QIODevice::WriteOnly));
  file.write(
      "0\nSECTION\n2\nHEADER\n9\n$"
      "INSUNITS\n70\n4\n0\nENDSEC\n0\nSECTION\n2\nENTITIES\n0\nLINE\n8\n0\n10\n0\n20\n0\n11\n50\n21\n0\n"
      "0\n3DFACE\n8\n0\n10\n0\n20\n0\n0\nENDSEC\n0\nEOF\n");
  file.close();
  whenModal([](QWidget* box) { press(box, "goOn"); });
  open(path);
  EXPECT_EQ(document.contourCount(), 1);
  ASSERT_EQ(document.drawing()->skipped.size(), 1U);
  EXPECT_EQ(document.drawing()->skipped.front().kind, "3DFACE");
  auto* leftOut = window.findChild<QLabel*>("leftOut");  // stays in sight
  EXPECT_TRUE(leftOut->isVisible());
  EXPECT_TRUE(leftOut->text().contains("1 3DFACE")) << leftOut->text().toStdString();
}

TEST_F(Window, OpensNothingWhenTheUnitIsNotGiven) {
  QSignalSpy asked(&document, &Document::openNeedsUnits);
  whenModal([](QWidget* box) { static_cast<QDialog*>(box)->reject(); });
  window.openDrawing(sample("oar_blade.dxf"));
  ASSERT_TRUE(asked.wait(20'000));
  EXPECT_TRUE(document.isEmpty());
  EXPECT_FALSE(document.isOpening());
}

TEST_F(Window, ReportsADamagedDrawingAndKeepsTheOpenOne) {
  open(sample("gasket.dxf"));
  const QString path = dir.filePath("cut.dxf");
  QFile whole(sample("cam_plate.dxf")), cut(path);
  ASSERT_TRUE(whole.open(QIODevice::ReadOnly) && cut.open(QIODevice::WriteOnly));
  cut.write(whole.readAll().left(9'000));
  cut.close();
  QString message;
  QSignalSpy failed(&document, &Document::failed);
  whenModal([&message](QWidget* box) {
    message = qobject_cast<QMessageBox*>(box)->text();
    static_cast<QDialog*>(box)->accept();
  });
  window.openDrawing(path);
  ASSERT_TRUE(failed.wait(20'000));
  EXPECT_TRUE(message.contains("cut.dxf")) << message.toStdString();
  EXPECT_EQ(document.drawing()->name, "gasket.dxf");
}

TEST_F(Window, OpensADroppedDrawing) {
  QMimeData data;
  data.setUrls({QUrl::fromLocalFile(sample("propeller_template.dxf"))});
  QDragEnterEvent enter(QPoint(10, 10), Qt::CopyAction, &data, Qt::LeftButton, Qt::NoModifier);
  QApplication::sendEvent(&window, &enter);
  ASSERT_TRUE(enter.isAccepted());
  QDropEvent drop(QPointF(10, 10), Qt::CopyAction, &data, Qt::LeftButton, Qt::NoModifier);
  QSignalSpy planned(&document, &Document::plansChanged);
  QApplication::sendEvent(&window, &drop);
  ASSERT_TRUE(planned.wait(20'000));
  EXPECT_EQ(document.drawing()->name, "propeller_template.dxf");
}

TEST_F(Window, ExportsPointsAfterTheCautionsAndTheyReadBack) {
  open(sample("gasket.dxf"));
  const QString path = dir.filePath("points.csv");
  QSignalSpy exported(&window, &MainWindow::pointsExported);
  whenModal([&](QWidget* caution) {
    EXPECT_EQ(caution->objectName(), "cautionBox");
    EXPECT_FALSE(caution->findChild<QPushButton*>("accept")->isEnabled());  // examples need a tick first
    caution->findChild<QCheckBox*>("checked")->setChecked(true);
    whenModal([&](QWidget* dialog) {
      if (dialog == caution) return;
      EXPECT_EQ(dialog->objectName(), "pointsDialog");
      dialog->findChild<QLineEdit*>("path")->setText(path);
      dialog->findChild<QDoubleSpinBox*>("step")->setValue(0.01);
      static_cast<QDialog*>(dialog)->accept();
    });
    press(caution, "accept");
  });
  QTest::keyClick(&window, Qt::Key_E, Qt::ControlModifier);
  ASSERT_TRUE(!exported.isEmpty() || exported.wait(20'000));
  RunControl control;
  const auto read = read::readDrawing(path.toStdString(), {}, control);
  ASSERT_TRUE(read) << read.error().message;
  EXPECT_EQ(read->unitName, "mm");
  EXPECT_GT(read->curves.size(), 300U);
  const curve::Vec2 first = read->curves.front().curve.startPoint();
  EXPECT_NEAR(first.x, document.planAt(0)->path->x[0], 1e-6);
  EXPECT_NEAR(first.y, document.planAt(0)->path->y[0], 1e-6);
}

TEST_F(Window, LeavesAnExistingFileAloneUnlessTold) {
  open(sample("gasket.dxf"));
  document.confirmLimitsAreMine();
  const QString path = dir.filePath("points.csv");
  QFile old(path);
  ASSERT_TRUE(old.open(QIODevice::WriteOnly));
  old.write("old");
  old.close();
  bool asked = false;
  whenModal([&](QWidget* caution) {
    whenModal([&](QWidget* dialog) {
      dialog->findChild<QLineEdit*>("path")->setText(path);
      whenModal([&](QWidget* question) {
        asked = true;
        qobject_cast<QMessageBox*>(question)->button(QMessageBox::No)->click();
      });
      static_cast<QDialog*>(dialog)->accept();
    });
    press(caution, "accept");
  });
  QTest::keyClick(&window, Qt::Key_E, Qt::ControlModifier);
  EXPECT_TRUE(asked);
  ASSERT_TRUE(old.open(QIODevice::ReadOnly));
  EXPECT_EQ(old.readAll(), "old");
}

TEST_F(Window, SaysWhyAPointListCouldNotBeWritten) {
  open(sample("gasket.dxf"));
  document.confirmLimitsAreMine();
  QString message;
  QEventLoop untilTold;
  whenModal([&](QWidget* caution) {
    whenModal([&](QWidget* dialog) {
      dialog->findChild<QLineEdit*>("path")->setText(dir.filePath("no such folder/points.csv"));
      whenModal([&](QWidget* error) {
        message = qobject_cast<QMessageBox*>(error)->text();
        static_cast<QDialog*>(error)->accept();
        untilTold.quit();
      });
      static_cast<QDialog*>(dialog)->accept();
    });
    press(caution, "accept");
  });
  QTest::keyClick(&window, Qt::Key_E, Qt::ControlModifier);
  if (message.isEmpty()) untilTold.exec();
  EXPECT_TRUE(message.contains("points.csv")) << message.toStdString();
}

TEST_F(Window, AsksBeforeChangedLimitsAreLost) {
  open(sample("gasket.dxf"));
  EXPECT_TRUE(window.findChild<QLabel*>("totalTime")->isVisible());
  window.findChild<QDoubleSpinBox*>("path.feed_mm_per_min")->setValue(3000.0);
  EXPECT_TRUE(window.windowTitle().contains("not saved"));
  whenModal([](QWidget* box) { qobject_cast<QMessageBox*>(box)->button(QMessageBox::Cancel)->click(); });
  window.close();
  EXPECT_TRUE(window.isVisible());
  document.undoStack().undo();
  window.close();
  EXPECT_FALSE(window.isVisible());
}

TEST_F(Window, MarksTheStretchThatThePlotShows) {
  open(sample("gasket.dxf"));
  EXPECT_FALSE(document.stretch());
  document.showPlace(100.0, 2.0);
  ASSERT_TRUE(document.stretch());
  EXPECT_NEAR(document.stretch()->first, window.plot().rangeLow(), 1e-9);
  EXPECT_NEAR(document.stretch()->second, window.plot().rangeHigh(), 1e-9);
  window.plot().showWhole();
  EXPECT_FALSE(document.stretch());
}

TEST_F(Window, PlaysAlongThePathInTime) {
  open(sample("gasket.dxf"));
  QSignalSpy moved(&document, &Document::cursorChanged);
  QTest::keyClick(&window, Qt::Key_F5);
  ASSERT_TRUE(moved.wait(5'000));
  const double early = document.cursor().value_or(-1.0);
  ASSERT_TRUE(moved.wait(5'000));
  EXPECT_GE(*document.cursor(), early);
  QTest::keyClick(&window, Qt::Key_Escape);
}

}  // namespace
}  // namespace kf::ui
