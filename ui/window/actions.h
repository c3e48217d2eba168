// The window's actions; internal to window.
// No units here.
#pragma once

#include "ui/window/main_window.h"

class QAction;

namespace kf::ui {

struct MainWindow::Actions {
  QAction *open, *openLimits, *saveLimits, *saveLimitsAs, *exportPoints, *saveCanvas, *savePlot, *quit;
  QAction *undo, *redo, *copySpots;
  QAction *fit, *whole, *zoomIn, *zoomOut, *againstTime, *inches, *bySpeed, *byCurvature, *byLimit;
  QAction *play, *pin, *unpin, *nextContour, *previousContour, *stop;
  QAction *cautions, *about;
};

}  // namespace kf::ui
