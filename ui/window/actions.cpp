// The window's actions, menus and tool bar.
// No units here.
#include "ui/window/actions.h"

#include <QAction>
#include <QActionGroup>
#include <QComboBox>
#include <QLabel>
#include <QMenuBar>
#include <QMessageBox>
#include <QStatusBar>
#include <QToolBar>
#include <QToolButton>

#include "ui/canvas/canvas.h"
#include "ui/dialogs/dialogs.h"
#include "ui/plot/plot_pane.h"

namespace kf::ui {
namespace {

QIcon iconNamed(const char* name) {
  return QIcon(QStringLiteral(":/kappafeed/icons/%1.svg").arg(QLatin1String(name)));
}

}  // namespace

void MainWindow::makeActions() {
  const auto make = [this](const QString& text, const QKeySequence& key, const QString& tip = {},
                           const char* icon = nullptr) {
    auto* action = new QAction(text, this);
    if (icon != nullptr) action->setIcon(iconNamed(icon));
    action->setShortcut(key);
    QString shown = tip.isEmpty() ? QString(text).remove(u'&').remove(u'\u2026') : tip;
    if (!key.isEmpty()) shown += QStringLiteral(" (%1)").arg(key.toString(QKeySequence::NativeText));
    action->setToolTip(shown);
    return action;
  };
  const auto toggle = [&](const QString& text, const QKeySequence& key, const QString& tip = {},
                          const char* icon = nullptr) {
    QAction* action = make(text, key, tip, icon);
    action->setCheckable(true);
    return action;
  };
  Actions& a = *act_;
  a.open = make(tr("&Open drawing\u2026"), QKeySequence::Open, {}, "open");
  a.openLimits = make(tr("Open &limits\u2026"), QKeySequence(tr("Ctrl+L")), {}, "limits");
  a.saveLimits = make(tr("&Save limits"), QKeySequence::Save);
  a.saveLimitsAs = make(tr("Save limits &as\u2026"), QKeySequence(tr("Ctrl+Shift+S")));
  a.exportPoints =
      make(tr("&Export points\u2026"), QKeySequence(tr("Ctrl+E")), tr("Write the point list"), "export");
  a.saveCanvas = make(tr("Save picture of the &drawing\u2026"), QKeySequence(tr("Ctrl+Shift+D")));
  a.savePlot = make(tr("Save picture of the &plot\u2026"), QKeySequence(tr("Ctrl+Shift+P")));
  a.quit = make(tr("&Quit"), QKeySequence(tr("Ctrl+Q")));
  a.undo = document_.undoStack().createUndoAction(this, tr("Undo"));
  a.undo->setShortcut(QKeySequence::Undo);
  a.undo->setIcon(iconNamed("undo"));
  a.redo = document_.undoStack().createRedoAction(this, tr("Redo"));
  a.redo->setShortcuts({QKeySequence(tr("Ctrl+Shift+Z")), QKeySequence(tr("Ctrl+Y"))});
  a.redo->setIcon(iconNamed("redo"));
  a.copySpots = make(tr("&Copy tight spots"), QKeySequence(tr("Ctrl+Shift+C")));
  a.fit = make(tr("&Fit drawing"), QKeySequence(tr("F")), {}, "fit");
  a.whole = make(tr("&Whole path in the plot"), QKeySequence(tr("W")));
  a.zoomIn = make(tr("Zoom &in"), QKeySequence::ZoomIn, {}, "zoom_in");
  a.zoomOut = make(tr("Zoom &out"), QKeySequence::ZoomOut, {}, "zoom_out");
  a.againstTime = toggle(tr("Plot against &time"), QKeySequence(tr("T")), {}, "time");
  a.inches = toggle(tr("Show i&nches"), QKeySequence(tr("I")), tr("Inches instead of millimetres"));
  a.bySpeed = toggle(tr("Colour by planned &speed"), QKeySequence(tr("1")));
  a.byCurvature = toggle(tr("Colour by &curvature"), QKeySequence(tr("2")));
  a.byLimit = toggle(tr("Colour by what &limits"), QKeySequence(tr("3")));
  a.play = toggle(tr("&Play"), QKeySequence(tr("F5")), tr("Move a marker along the path in time"), "play");
  a.pin =
      make(tr("Pin &plan"), QKeySequence(tr("P")), tr("Keep this plan to compare later ones with"), "pin");
  a.unpin = make(tr("&Unpin"), QKeySequence(tr("Shift+P")), tr("Drop the pinned plan"));
  a.nextContour = make(tr("&Next contour"), QKeySequence(tr("Ctrl+PgDown")));
  a.previousContour = make(tr("P&revious contour"), QKeySequence(tr("Ctrl+PgUp")));
  a.stop = make(tr("&Stop"), QKeySequence(Qt::Key_Escape), tr("Stop opening, planning or playing"));
  a.cautions = make(tr("&Cautions\u2026"), QKeySequence(tr("F1")));
  a.about = make(tr("&About Kappafeed\u2026"), {});
  a.inches->setChecked(document_.units() == Units::inch);

  connect(a.open, &QAction::triggered, this, &MainWindow::chooseDrawing);
  connect(a.openLimits, &QAction::triggered, this, &MainWindow::chooseLimits);
  connect(a.saveLimits, &QAction::triggered, this, [this] { saveLimits(false); });
  connect(a.saveLimitsAs, &QAction::triggered, this, [this] { saveLimits(true); });
  connect(a.exportPoints, &QAction::triggered, this, &MainWindow::exportPoints);
  connect(a.saveCanvas, &QAction::triggered, this, [this] { exportPicture(false); });
  connect(a.savePlot, &QAction::triggered, this, [this] { exportPicture(true); });
  connect(a.quit, &QAction::triggered, this, &QWidget::close);
  connect(a.copySpots, &QAction::triggered, this, &MainWindow::copySpots);
  connect(a.fit, &QAction::triggered, canvas_, &Canvas::fit);
  connect(a.whole, &QAction::triggered, plot_, &PlotPane::showWhole);
  connect(a.zoomIn, &QAction::triggered, this, [this] { canvas_->zoomBy(1.25, canvas_->rect().center()); });
  connect(a.zoomOut, &QAction::triggered, this, [this] { canvas_->zoomBy(0.8, canvas_->rect().center()); });
  connect(a.againstTime, &QAction::toggled, plot_, &PlotPane::setAgainstTime);
  connect(a.inches, &QAction::toggled, this, [this](bool inches) {
    document_.setUnits(inches ? Units::inch : Units::mm);
    settings_.set(Key::shownInches, inches);
  });
  connect(a.play, &QAction::toggled, this, &MainWindow::togglePlay);
  connect(a.pin, &QAction::triggered, &document_, &Document::pinReference);
  connect(a.unpin, &QAction::triggered, &document_, &Document::dropReference);
  connect(a.nextContour, &QAction::triggered, this, [this] { document_.choose(document_.chosen() + 1); });
  connect(a.previousContour, &QAction::triggered, this, [this] { document_.choose(document_.chosen() - 1); });
  connect(a.stop, &QAction::triggered, this, [this] {
    if (document_.isOpening()) {
      document_.cancelOpening();
      statusBar()->showMessage(tr("Stopped opening"), 5'000);
    }
    togglePlay(false);
  });
  connect(a.cautions, &QAction::triggered, this,
          [this] { QMessageBox::information(this, tr("Cautions"), cautionText()); });
  connect(a.about, &QAction::triggered, this, [this] {
    QMessageBox::about(this, tr("About Kappafeed"),
                       tr("<b>Kappafeed %1</b><p>Feed planning along 2D contours: how fast each stretch may "
                          "be driven, what costs the time, and a "
                          "bound that no plan beats.</p><p>Free software under the GNU General Public "
                          "License, version 3 or later; it comes without "
                          "any warranty.</p>")
                           .arg(QStringLiteral(KAPPAFEED_VERSION)));
  });
  auto* colours = new QActionGroup(this);
  const QList<QAction*> ways = {a.bySpeed, a.byCurvature, a.byLimit};
  for (int i = 0; i < ways.size(); ++i) {
    colours->addAction(ways[i]);
    connect(ways[i], &QAction::triggered, this,
            [this, i] { document_.setColouring(static_cast<Colouring>(i)); });
  }
  a.bySpeed->setChecked(true);
}

void MainWindow::makeMenus() {
  Actions& a = *act_;
  QMenu* file = menuBar()->addMenu(tr("&File"));
  file->addActions({a.open, a.openLimits, a.saveLimits, a.saveLimitsAs});
  file->addSeparator();
  file->addActions({a.exportPoints, a.saveCanvas, a.savePlot});
  file->addSeparator();
  file->addAction(a.quit);
  QMenu* edit = menuBar()->addMenu(tr("&Edit"));
  edit->addActions({a.undo, a.redo, a.copySpots});
  QMenu* view = menuBar()->addMenu(tr("&View"));
  view->addActions({a.fit, a.whole, a.zoomIn, a.zoomOut});
  view->addSeparator();
  view->addActions({a.bySpeed, a.byCurvature, a.byLimit});
  view->addSeparator();
  view->addActions({a.againstTime, a.inches});
  QMenu* plan = menuBar()->addMenu(tr("&Plan"));
  plan->addActions({a.play, a.stop, a.pin, a.unpin});
  plan->addSeparator();
  plan->addActions({a.nextContour, a.previousContour});
  QMenu* help = menuBar()->addMenu(tr("&Help"));
  help->addActions({a.cautions, a.about});

  makeToolBar();
}

void MainWindow::makeToolBar() {
  Actions& a = *act_;
  auto* bar = addToolBar(tr("Tools"));
  bar->setObjectName(QStringLiteral("tools"));
  bar->setMovable(false);
  bar->setIconSize(QSize(20, 20));
  bar->setToolButtonStyle(Qt::ToolButtonTextBesideIcon);
  bar->setContextMenuPolicy(Qt::PreventContextMenu);
  const auto iconOnly = [bar](QAction* action) {
    static_cast<QToolButton*>(bar->widgetForAction(action))->setToolButtonStyle(Qt::ToolButtonIconOnly);
  };
  a.open->setIconText(tr("Open"));
  a.openLimits->setIconText(tr("Limits"));
  a.exportPoints->setIconText(tr("Export"));
  a.pin->setIconText(tr("Pin"));
  bar->addActions({a.open, a.openLimits, a.exportPoints});
  bar->addSeparator();
  bar->addActions({a.undo, a.redo, a.zoomIn, a.zoomOut, a.fit});
  for (QAction* action : {a.undo, a.redo, a.zoomIn, a.zoomOut, a.fit}) iconOnly(action);
  bar->addSeparator();
  auto* label = new QLabel(tr(" Colour by "), bar);
  bar->addWidget(label);
  colouring_ = new QComboBox(bar);
  colouring_->setObjectName(QStringLiteral("colouring"));
  colouring_->setAccessibleName(tr("Colour by"));
  colouring_->addItems({tr("planned speed"), tr("curvature"), tr("what limits")});
  label->setBuddy(colouring_);
  bar->addWidget(colouring_);
  connect(colouring_, &QComboBox::activated, this,
          [this](int i) { document_.setColouring(static_cast<Colouring>(i)); });
  connect(&document_, &Document::colouringChanged, this, [this] {
    const int i = static_cast<int>(document_.colouring());
    colouring_->setCurrentIndex(i);
    QAction* ways[] = {act_->bySpeed, act_->byCurvature, act_->byLimit};
    ways[i]->setChecked(true);
  });
  bar->addSeparator();
  bar->addActions({a.againstTime, a.inches});
  iconOnly(a.againstTime);
  a.inches->setIconText(tr("inch"));
  bar->addSeparator();
  bar->addAction(a.play);
  iconOnly(a.play);
  rate_ = new QComboBox(bar);
  rate_->setObjectName(QStringLiteral("rate"));
  rate_->setAccessibleName(tr("Play rate"));
  rate_->setToolTip(tr("How much faster than the machine the marker moves"));
  for (double rate : {0.1, 0.5, 1.0, 2.0, 10.0, 100.0})
    rate_->addItem(QStringLiteral("\u00D7%1").arg(rate), rate);
  rate_->setCurrentIndex(2);
  bar->addWidget(rate_);
  bar->addSeparator();
  bar->addActions({a.pin, a.unpin});
}

void MainWindow::refreshActions() {
  Actions& a = *act_;
  const bool drawing = !document_.isEmpty(), planned = document_.plan() != nullptr;
  a.saveLimits->setEnabled(!document_.limitsAreSaved() || document_.limitsPath().isEmpty());
  for (QAction* action : {a.fit, a.whole, a.zoomIn, a.zoomOut, a.saveCanvas}) action->setEnabled(drawing);
  for (QAction* action : {a.exportPoints, a.savePlot, a.copySpots, a.play, a.pin})
    action->setEnabled(planned);
  a.unpin->setEnabled(!document_.reference().empty());
  a.nextContour->setEnabled(document_.chosen() + 1 < document_.contourCount());
  a.previousContour->setEnabled(document_.chosen() > 0);
}

}  // namespace kf::ui
