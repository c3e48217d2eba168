// The one window: canvas and plot, limits, tables, and the actions that join them.
// Units as shown.
#pragma once

#include <QElapsedTimer>
#include <QMainWindow>
#include <QTimer>

#include "ui/models/document.h"
#include "ui/settings/settings.h"

class QActionGroup;
class QComboBox;
class QTabWidget;
class QLabel;
class QToolBar;

namespace kf::ui {

class Canvas;
class ContourTable;
class CursorReadout;
class ImportPanel;
class JointPanel;
class LimitsPanel;
class PlotPane;
class SpotTable;
class SummaryPanel;
class TimeStrip;

class MainWindow : public QMainWindow {
  Q_OBJECT

 public:
  MainWindow(Document& document, Settings& settings, QWidget* parent = nullptr);
  ~MainWindow() override;

  void openDrawing(const QString& path);
  Canvas& canvas() { return *canvas_; }
  PlotPane& plot() { return *plot_; }
  SpotTable& spots() { return *spots_; }
  CursorReadout& readout() { return *readout_; }

 signals:
  // After a point list was written, with its path.
  void pointsExported(const QString& path);
  // More drawings were dropped than one window shows.
  void windowWanted(const QString& path);

 protected:
  void dragEnterEvent(QDragEnterEvent* event) override;
  void dropEvent(QDropEvent* event) override;
  void closeEvent(QCloseEvent* event) override;

 private:
  void makeActions();
  void makeMenus();
  void makeToolBar();
  QWidget* makeLeft();
  QWidget* makeRight();
  void makeLayout();
  void connectDocument();
  void refreshTitle();
  void refreshActions();
  void chooseDrawing();
  void chooseLimits();
  bool saveLimits(bool elsewhere);  // false: the user gave up, or it failed
  bool mayLoseLimits();             // asks when they are not saved
  void exportPoints();
  void exportPicture(bool plot);
  void copySpots();
  void togglePlay(bool play);
  void advancePlay();
  void showError(const QString& message);
  void showImport();
  void finishExport(const QString& path, const Result<void>& written);

  Document& document_;
  Settings& settings_;
  Canvas* canvas_ = nullptr;
  PlotPane* plot_ = nullptr;
  LimitsPanel* limits_ = nullptr;
  ContourTable* contours_ = nullptr;
  SpotTable* spots_ = nullptr;
  TimeStrip* strip_ = nullptr;
  SummaryPanel* summary_ = nullptr;
  CursorReadout* readout_ = nullptr;
  JointPanel* joints_ = nullptr;
  ImportPanel* import_ = nullptr;
  QTabWidget* tabs_ = nullptr;
  QLabel* leftOut_ = nullptr;
  Runner<void> exporter_;
  QComboBox *colouring_ = nullptr, *rate_ = nullptr;
  struct Actions;
  std::unique_ptr<Actions> act_;
  QTimer playTimer_;
  QElapsedTimer playClock_;
  double playFrom_ = 0.0;
};

}  // namespace kf::ui
