// How long the window takes: a limit change to the redrawn picture, and opening to the planned picture.
// ms, the median of repeats in one run; the plan alone stands beside it for scale.
#include <QApplication>
#include <QEventLoop>
#include <QTemporaryDir>
#include <algorithm>
#include <chrono>
#include <clocale>
#include <cstdio>
#include <vector>

#include "ui/canvas/canvas.h"
#include "ui/plot/plot_pane.h"
#include "ui/window/main_window.h"

namespace kf::ui {
namespace {

using Clock = std::chrono::steady_clock;

double millisecondsSince(Clock::time_point start) {
  return std::chrono::duration<double, std::milli>(Clock::now() - start).count();
}

double median(std::vector<double> list) {
  std::nth_element(list.begin(), list.begin() + static_cast<std::ptrdiff_t>(list.size() / 2), list.end());
  return list[list.size() / 2];
}

struct Bench {
  QTemporaryDir dir;
  Settings settings{dir.filePath("settings.ini")};
  Document document;
  MainWindow window{document, settings};

  Bench() {
    window.resize(1400, 900);
    window.show();
    document.loadLimits(QStringLiteral(KF_SOURCE_DIR "/samples/limits/example-router.json"));
    document.setLaw(plan::Law::acceleration);
  }

  void drawAll() {
    QApplication::processEvents();  // queued replots, laying out and painting of all that has changed
    window.canvas().grab();         // whatever the platform, the canvas is painted
  }

  double open(const QString& path) {
    QEventLoop untilPlanned;
    QObject::connect(&document, &Document::plansChanged, &untilPlanned, &QEventLoop::quit);
    const auto start = Clock::now();
    window.openDrawing(path);
    untilPlanned.exec();
    drawAll();
    return millisecondsSince(start);
  }
};

void run() {
  Bench bench;
  std::vector<double> opening;
  for (int i = 0; i < 5; ++i)
    opening.push_back(bench.open(QStringLiteral(KF_SOURCE_DIR "/samples/deck_inlay.dxf")));
  const auto& drawing = *bench.document.drawing();
  std::size_t entities = 0;
  for (const auto& contour : drawing.contours) entities += contour.segments.size();
  std::printf("open to planned picture   %7.1f ms   %zu entities, %zu nodes\n", median(opening), entities,
              bench.document.plan()->path->size());

  const limits::Field& feed = *limits::findField("path.feed_mm_per_min");
  for (const char* name : {"name_board.dxf", "gasket.dxf", "deck_inlay.dxf"}) {
    bench.open(QStringLiteral(KF_SOURCE_DIR "/samples/") + QLatin1String(name));
    std::size_t nodes = 0;
    for (int i = 0; i < bench.document.contourCount(); ++i) nodes += bench.document.planAt(i)->path->size();
    std::vector<double> planOnly, redraw;
    for (int i = 0; i < 21; ++i) {
      RunControl control;
      auto start = Clock::now();
      for (int c = 0; c < bench.document.contourCount(); ++c) {
        if (!pipeline::planContour(*bench.document.preparedAt(c), bench.document.limits(),
                                   bench.document.choices(), false, control))
          return;
      }
      planOnly.push_back(millisecondsSince(start));
      start = Clock::now();
      bench.document.setField(feed, 6000.0 + 10.0 * i);
      bench.drawAll();
      redraw.push_back(millisecondsSince(start));
    }
    std::printf("limit change to redraw    %7.1f ms   %s, %zu nodes; plan alone %.1f ms, ratio %.1f\n",
                median(redraw), name, nodes, median(planOnly), median(redraw) / median(planOnly));
  }
}

}  // namespace
}  // namespace kf::ui

int main(int argc, char** argv) {
  if (qEnvironmentVariableIsEmpty("QT_QPA_PLATFORM")) qputenv("QT_QPA_PLATFORM", "offscreen");
  QApplication application(argc, argv);
  std::setlocale(LC_NUMERIC, "C");
  kf::ui::run();
  return 0;
}
