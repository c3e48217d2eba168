// The one window: its layout and what its actions do.
// Units as shown.
#include "ui/window/main_window.h"

#include <QAction>
#include <QActionGroup>
#include <QApplication>
#include <QClipboard>
#include <QCloseEvent>
#include <QComboBox>
#include <QDir>
#include <QDragEnterEvent>
#include <QDropEvent>
#include <QFileDialog>
#include <QFileInfo>
#include <QLabel>
#include <QMessageBox>
#include <QMimeData>
#include <QProgressDialog>
#include <QSplitter>
#include <QStatusBar>
#include <QTabWidget>
#include <QUrl>
#include <QVBoxLayout>

#include "ui/canvas/canvas.h"
#include "ui/dialogs/dialogs.h"
#include "ui/panels/import_panel.h"
#include "ui/panels/limits_panel.h"
#include "ui/panels/summary_panel.h"
#include "ui/panels/tables.h"
#include "ui/panels/time_strip.h"
#include "ui/plot/plot_pane.h"
#include "ui/window/actions.h"

// The icons live in a static library: they must be asked for by name, outside any namespace.
static void loadIcons() {
  Q_INIT_RESOURCE(window);
}

namespace kf::ui {

MainWindow::MainWindow(Document& document, Settings& settings, QWidget* parent)
    : QMainWindow(parent), document_(document), settings_(settings), act_(std::make_unique<Actions>()) {
  loadIcons();
  setAcceptDrops(true);
  setWindowIcon(QIcon(QStringLiteral(":/kappafeed/kappafeed.svg")));
  document_.setUnits(settings_.value(Key::shownInches).toBool() ? Units::inch : Units::mm);
  makeLayout();
  makeActions();
  makeMenus();
  connectDocument();
  resize(1400, 900);
  restoreGeometry(settings_.value(Key::windowGeometry).toByteArray());
  refreshTitle();
  refreshActions();
  playTimer_.setInterval(16);
  connect(&playTimer_, &QTimer::timeout, this, &MainWindow::advancePlay);
}

MainWindow::~MainWindow() = default;

void MainWindow::makeLayout() {
  auto* all = new QSplitter(Qt::Horizontal, this);
  all->addWidget(makeLeft());
  all->addWidget(makeRight());
  all->setStretchFactor(0, 1);
  all->setSizes({880, 520});
  all->setChildrenCollapsible(false);
  setCentralWidget(all);
  statusBar();
}

// Canvas over plot, with the readout above and the time strip below.
QWidget* MainWindow::makeLeft() {
  canvas_ = new Canvas(document_, this);
  plot_ = new PlotPane(document_, this);
  strip_ = new TimeStrip(document_, this);
  readout_ = new CursorReadout(document_, this);
  auto* pictures = new QSplitter(Qt::Vertical, this);
  pictures->addWidget(canvas_);
  pictures->addWidget(plot_);
  pictures->setSizes({460, 310});
  pictures->setStretchFactor(0, 3);
  pictures->setStretchFactor(1, 2);
  pictures->setChildrenCollapsible(false);
  auto* box = new QWidget(this);
  auto* layout = new QVBoxLayout(box);
  layout->setContentsMargins(0, 0, 0, 0);
  layout->setSpacing(0);
  layout->addWidget(readout_);
  layout->addWidget(pictures, 1);
  layout->addWidget(strip_);
  return box;
}

// Time, contours, limits, and below them tabs with what there is to look up.
QWidget* MainWindow::makeRight() {
  summary_ = new SummaryPanel(document_, this);
  contours_ = new ContourTable(document_, this);
  limits_ = new LimitsPanel(document_, this);
  spots_ = new SpotTable(document_, this);
  joints_ = new JointPanel(document_, this);
  import_ = new ImportPanel(document_, this);
  leftOut_ = new QLabel(this);
  leftOut_->setObjectName(QStringLiteral("leftOut"));
  leftOut_->setWordWrap(true);
  leftOut_->setTextFormat(Qt::PlainText);
  leftOut_->setStyleSheet(
      QStringLiteral("background:#fff3d6; color:#5b3a00; padding:4px; border-left:4px solid #E69F00;"));
  leftOut_->hide();
  contours_->hide();  // until there are some
  tabs_ = new QTabWidget(this);
  tabs_->setObjectName(QStringLiteral("tabs"));
  tabs_->setDocumentMode(true);
  tabs_->addTab(spots_, tr("Ti&ght spots"));
  tabs_->addTab(joints_, tr("&Corners"));
  tabs_->addTab(import_, tr("&Drawing"));
  auto* parts = new QSplitter(Qt::Vertical, this);
  parts->addWidget(contours_);
  parts->addWidget(limits_);
  parts->addWidget(tabs_);
  contours_->setMinimumHeight(54);
  limits_->setMinimumHeight(150);
  tabs_->setMinimumHeight(110);
  parts->setSizes({90, 380, 250});
  parts->setStretchFactor(0, 0);
  parts->setStretchFactor(1, 3);
  parts->setStretchFactor(2, 2);
  parts->setChildrenCollapsible(false);
  auto* box = new QWidget(this);
  box->setMinimumWidth(400);
  auto* layout = new QVBoxLayout(box);
  layout->setContentsMargins(0, 0, 0, 0);
  layout->setSpacing(0);
  layout->addWidget(summary_);
  layout->addWidget(leftOut_);
  layout->addWidget(parts, 1);
  return box;
}

void MainWindow::connectDocument() {
  connect(&document_, &Document::opening, this, [this](const QString& path) {
    statusBar()->showMessage(tr("Opening %1\u2026 (Esc stops it)").arg(path));
  });
  connect(&document_, &Document::openingEnded, this, [this] { statusBar()->clearMessage(); });
  connect(&document_, &Document::opened, this, [this] {
    act_->play->setChecked(false);
    refreshTitle();
    refreshActions();
    showImport();
  });
  connect(&document_, &Document::openNeedsUnits, this,
          [this](const QString& path, pipeline::OpenOptions options) {
            options.millimetresPerUnit = askUnits(this, path);
            if (options.millimetresPerUnit) document_.open(path, options);
          });
  connect(&document_, &Document::openNeedsSkipping, this,
          [this](const QString& path, pipeline::OpenOptions options, const QString& message) {
            options.allowSkipped = askGoOnWithout(this, message);
            if (options.allowSkipped) document_.open(path, options);
          });
  connect(&document_, &Document::failed, this, &MainWindow::showError);
  for (auto signal : {&Document::plansChanged, &Document::referenceChanged, &Document::chosenChanged})
    connect(&document_, signal, this, &MainWindow::refreshActions);
  connect(&document_, &Document::limitsChanged, this, [this] {
    refreshTitle();
    refreshActions();
  });
}

void MainWindow::refreshTitle() {
  const QString drawing =
      document_.isEmpty() ? tr("no drawing") : QString::fromStdString(document_.drawing()->name);
  const QString changed = document_.limitsAreSaved() ? QString() : tr(" (limits not saved)");
  setWindowTitle(tr("%1%2 \u2013 Kappafeed").arg(drawing, changed));
}

// What was left out stays in sight as long as the drawing is open; the tab has it all.
void MainWindow::showImport() {
  leftOut_->setText(ImportPanel::leftOut(document_));
  leftOut_->setVisible(!leftOut_->text().isEmpty());
  const auto notes = document_.drawing()->warnings.size();
  tabs_->setTabText(2, notes == 0 ? tr("&Drawing") : tr("&Drawing (%1)").arg(notes));
  contours_->setVisible(document_.contourCount() > 0);
}

void MainWindow::openDrawing(const QString& path) {
  settings_.set(Key::lastFolder, QFileInfo(path).absolutePath());
  document_.open(path, {});
}

void MainWindow::chooseDrawing() {
  const QString path =
      QFileDialog::getOpenFileName(this, tr("Open drawing"), settings_.value(Key::lastFolder).toString(),
                                   tr("Drawings (*.dxf *.DXF *.svg *.SVG *.step *.STEP *.stp *.STP *.igs "
                                      "*.IGS *.iges *.IGES *.csv *.CSV *.txt *.xy);;All files (*)"));
  if (!path.isEmpty()) openDrawing(path);
}

void MainWindow::chooseLimits() {
  const QString path = QFileDialog::getOpenFileName(
      this, tr("Open limits"),
      document_.limitsPath().isEmpty() ? settings_.value(Key::lastFolder).toString() : document_.limitsPath(),
      tr("Limits (*.json);;All files (*)"));
  if (path.isEmpty()) return;
  settings_.set(Key::lastFolder, QFileInfo(path).absolutePath());
  document_.loadLimits(path);
}

bool MainWindow::saveLimits(bool elsewhere) {
  QString path = document_.limitsPath();
  if (path.isEmpty() || elsewhere) {
    QString proposed = path;
    if (proposed.isEmpty())
      proposed = QDir(settings_.value(Key::lastFolder).toString()).filePath(QStringLiteral("limits.json"));
    path = QFileDialog::getSaveFileName(this, tr("Save limits"), proposed, tr("Limits (*.json)"));
    if (path.isEmpty()) return false;
    if (QFileInfo(path).suffix().isEmpty()) path += QStringLiteral(".json");
  }
  if (!document_.saveLimits(path)) return false;
  statusBar()->showMessage(tr("Saved the limits in %1").arg(path), 10'000);
  return true;
}

bool MainWindow::mayLoseLimits() {
  if (document_.limitsAreSaved()) return true;
  QMessageBox box(QMessageBox::Question, tr("Save the limits?"),
                  tr("The limits were changed and are not saved in a file yet."),
                  QMessageBox::Save | QMessageBox::Discard | QMessageBox::Cancel, this);
  box.setObjectName(QStringLiteral("saveBox"));
  box.setDefaultButton(QMessageBox::Save);
  const int answer = box.exec();
  return answer == QMessageBox::Discard || (answer == QMessageBox::Save && saveLimits(false));
}

void MainWindow::exportPoints() {
  if (document_.plansForExport(false).empty()) return;
  if (!acceptCautions(this, document_.limits(), settings_)) return;
  PointsDialog dialog(document_, settings_, this);
  if (dialog.exec() != QDialog::Accepted) return;
  pipeline::PointListRequest request = dialog.request();
  const QString path = QString::fromStdString(request.outputPath);
  if (QFileInfo::exists(path)) {
    const auto answer =
        QMessageBox::question(this, tr("Replace the file?"), tr("%1 exists already. Replace it?").arg(path),
                              QMessageBox::Yes | QMessageBox::No, QMessageBox::No);
    if (answer != QMessageBox::Yes) return;
    request.force = true;
  }
  // In the background, with a way to stop it; the box appears when it takes a while.
  auto* progress =
      new QProgressDialog(tr("Writing %1\u2026").arg(QFileInfo(path).fileName()), tr("Stop"), 0, 0, this);
  progress->setWindowModality(Qt::WindowModal);
  progress->setAttribute(Qt::WA_DeleteOnClose);
  connect(progress, &QProgressDialog::canceled, &exporter_, [this] { exporter_.cancel(); });
  exporter_.start(
      [drawing = document_.drawingPtr(), plans = document_.plansForExport(dialog.onlyChosen()),
       limits = document_.limits(), request](RunControl& control) {
        return pipeline::exportPoints(*drawing, plans, limits, request, control);
      },
      [this, path, progress](const Result<void>& written) {
        progress->disconnect(&exporter_);
        progress->close();
        finishExport(path, written);
      });
}

void MainWindow::finishExport(const QString& path, const Result<void>& written) {
  if (!written) {
    showError(QString::fromStdString(written.error().message));
    return;
  }
  settings_.set(Key::lastFolder, QFileInfo(path).absolutePath());
  statusBar()->showMessage(tr("Wrote %1 and read it back").arg(path), 15'000);
  emit pointsExported(path);
}

void MainWindow::exportPicture(bool plot) {
  const QString path = QFileDialog::getSaveFileName(
      this, tr("Save picture"), settings_.value(Key::lastFolder).toString(), tr("PNG (*.png)"));
  if (path.isEmpty()) return;
  const bool saved = plot ? plot_->savePicture(path) : canvas_->grab().save(path, "PNG");
  if (!saved) showError(tr("%1 was not written; check the folder and the free space").arg(path));
}

void MainWindow::copySpots() {
  QApplication::clipboard()->setText(spots_->spots().asText());
}

void MainWindow::togglePlay(bool play) {
  const auto* planned = document_.plan();
  if (!play || planned == nullptr) {
    playTimer_.stop();
    act_->play->setChecked(false);
    act_->play->setIcon(QIcon(QStringLiteral(":/kappafeed/icons/play.svg")));
    return;
  }
  act_->play->setIcon(QIcon(QStringLiteral(":/kappafeed/icons/pause.svg")));
  const double at = document_.cursor() ? planned->plan.schedule.atLength(*document_.cursor()).t : 0.0;
  playFrom_ = at >= planned->plan.time - 1e-6 ? 0.0 : at;
  playClock_.start();
  playTimer_.start();
}

void MainWindow::advancePlay() {
  const auto* planned = document_.plan();
  if (planned == nullptr) {
    togglePlay(false);
    return;
  }
  const double t =
      playFrom_ + 1e-3 * static_cast<double>(playClock_.elapsed()) * rate_->currentData().toDouble();
  document_.setCursor(planned->plan.schedule.atTime(t).s);
  if (t >= planned->plan.time) togglePlay(false);
}

void MainWindow::showError(const QString& message) {
  statusBar()->clearMessage();
  QMessageBox box(QMessageBox::Warning, tr("Kappafeed"), message, QMessageBox::Ok, this);
  box.setObjectName(QStringLiteral("errorBox"));
  box.setTextFormat(Qt::PlainText);
  box.exec();
}

void MainWindow::dragEnterEvent(QDragEnterEvent* event) {
  if (event->mimeData()->hasUrls()) event->acceptProposedAction();
}

void MainWindow::dropEvent(QDropEvent* event) {
  QStringList drawings;
  for (const QUrl& url : event->mimeData()->urls()) {
    if (!url.isLocalFile()) continue;
    event->acceptProposedAction();
    const QString path = url.toLocalFile();
    if (path.endsWith(QStringLiteral(".json"), Qt::CaseInsensitive)) {
      document_.loadLimits(path);
    } else {
      drawings << path;
    }
  }
  for (qsizetype i = 1; i < drawings.size(); ++i) emit windowWanted(drawings[i]);
  if (!drawings.isEmpty()) openDrawing(drawings.front());
}

void MainWindow::closeEvent(QCloseEvent* event) {
  if (!mayLoseLimits()) {
    event->ignore();
    return;
  }
  settings_.set(Key::windowGeometry, saveGeometry());
  event->accept();
}

}  // namespace kf::ui
