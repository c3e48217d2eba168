// The one window: its layout and what its actions do.
// Units as shown.
#include "ui/window/main_window.h"

#include <QAction>
#include <QActionGroup>
#include <QApplication>
#include <QClipboard>
#include <QCloseEvent>
#include <QComboBox>
#include <QDragEnterEvent>
#include <QDropEvent>
#include <QFileDialog>
#include <QFileInfo>
#include <QLabel>
#include <QMessageBox>
#include <QMimeData>
#include <QSplitter>
#include <QStatusBar>
#include <QUrl>
#include <QVBoxLayout>

#include "ui/canvas/canvas.h"
#include "ui/dialogs/dialogs.h"
#include "ui/panels/limits_panel.h"
#include "ui/panels/summary_panel.h"
#include "ui/panels/tables.h"
#include "ui/panels/time_strip.h"
#include "ui/plot/plot_pane.h"
#include "ui/window/actions.h"

namespace kf::ui {

MainWindow::MainWindow(Document& document, Settings& settings, QWidget* parent)
    : QMainWindow(parent), document_(document), settings_(settings), act_(std::make_unique<Actions>()) {
  setAcceptDrops(true);
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
  canvas_ = new Canvas(document_, this);
  plot_ = new PlotPane(document_, this);
  limits_ = new LimitsPanel(document_, this);
  contours_ = new ContourTable(document_, this);
  spots_ = new SpotTable(document_, this);
  strip_ = new TimeStrip(document_, this);
  summary_ = new SummaryPanel(document_, this);
  readout_ = new CursorReadout(document_, this);
  import_ = new QLabel(this);
  import_->setWordWrap(true);
  import_->setTextFormat(Qt::PlainText);
  import_->setStyleSheet(QStringLiteral("background:#fff3d6; color:#5b3a00; padding:4px;"));
  import_->hide();

  auto* left = new QSplitter(Qt::Vertical, this);
  left->addWidget(canvas_);
  left->addWidget(plot_);
  left->setSizes({460, 310});
  left->setStretchFactor(0, 3);
  left->setStretchFactor(1, 2);
  auto* leftBox = new QWidget(this);
  auto* leftLayout = new QVBoxLayout(leftBox);
  leftLayout->setContentsMargins(0, 0, 0, 0);
  leftLayout->setSpacing(4);
  leftLayout->addWidget(readout_);
  leftLayout->addWidget(left, 1);
  leftLayout->addWidget(strip_);

  const auto titled = [this](const QString& title, QWidget* content) {
    auto* box = new QWidget(this);
    auto* layout = new QVBoxLayout(box);
    layout->setContentsMargins(0, 2, 0, 0);
    layout->setSpacing(2);
    auto* label = new QLabel(title, box);
    label->setBuddy(content);
    label->setContentsMargins(8, 0, 0, 0);
    QFont bold = label->font();
    bold.setBold(true);
    label->setFont(bold);
    layout->addWidget(label);
    layout->addWidget(content, 1);
    return box;
  };
  auto* right = new QSplitter(Qt::Vertical, this);
  right->addWidget(titled(tr("Contours"), contours_));
  right->addWidget(titled(tr("Limits"), limits_));
  right->addWidget(titled(tr("Tight spots of the chosen contour, most time lost first"), spots_));
  right->setSizes({120, 380, 260});
  right->setStretchFactor(1, 1);
  auto* rightBox = new QWidget(this);
  auto* rightLayout = new QVBoxLayout(rightBox);
  rightLayout->setContentsMargins(0, 0, 0, 0);
  rightLayout->setSpacing(0);
  rightLayout->addWidget(summary_);
  rightLayout->addWidget(import_);
  rightLayout->addWidget(right, 1);

  auto* all = new QSplitter(Qt::Horizontal, this);
  all->addWidget(leftBox);
  all->addWidget(rightBox);
  all->setStretchFactor(0, 1);
  all->setSizes({920, 480});
  all->setChildrenCollapsible(false);
  setCentralWidget(all);
  statusBar();
}

void MainWindow::connectDocument() {
  connect(&document_, &Document::opening, this, [this](const QString& path) {
    statusBar()->showMessage(tr("Opening %1\u2026 (Esc stops it)").arg(path));
  });
  connect(&document_, &Document::opened, this, [this] {
    statusBar()->clearMessage();
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
  connect(&document_, &Document::limitsChanged, this, &MainWindow::refreshTitle);
  connect(&document_.undoStack(), &QUndoStack::cleanChanged, this, &MainWindow::refreshTitle);
}

void MainWindow::refreshTitle() {
  const QString drawing =
      document_.isEmpty() ? tr("no drawing") : QString::fromStdString(document_.drawing()->name);
  setWindowTitle(tr("%1 \u2013 Kappafeed").arg(drawing));
}

// What was left out or mended stays in sight as long as the drawing is open.
void MainWindow::showImport() {
  QStringList lines;
  for (const std::string& warning : document_.drawing()->warnings) lines << QString::fromStdString(warning);
  import_->setText(lines.join(u'\n'));
  import_->setVisible(!lines.isEmpty());
}

void MainWindow::openDrawing(const QString& path) {
  settings_.set(Key::lastFolder, QFileInfo(path).absolutePath());
  document_.open(path, {});
}

void MainWindow::chooseDrawing() {
  const QString path =
      QFileDialog::getOpenFileName(this, tr("Open drawing"), settings_.value(Key::lastFolder).toString(),
                                   tr("Drawings (*.dxf *.DXF *.csv *.CSV *.txt *.xy);;All files (*)"));
  if (!path.isEmpty()) openDrawing(path);
}

void MainWindow::chooseLimits() {
  const QString path = QFileDialog::getOpenFileName(this, tr("Open limits"), document_.limitsPath(),
                                                    tr("Limits (*.json);;All files (*)"));
  if (!path.isEmpty()) document_.loadLimits(path);
}

void MainWindow::saveLimits() {
  const QString path =
      QFileDialog::getSaveFileName(this, tr("Save limits"), document_.limitsPath(), tr("Limits (*.json)"));
  if (!path.isEmpty()) document_.saveLimits(path);
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
  QApplication::setOverrideCursor(Qt::WaitCursor);
  RunControl control;
  const auto written =
      pipeline::exportPoints(*document_.drawing(), document_.plansForExport(dialog.onlyChosen()),
                             document_.limits(), request, control);
  QApplication::restoreOverrideCursor();
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
  QApplication::clipboard()->setText(spots_->asText());
}

void MainWindow::togglePlay(bool play) {
  const auto* planned = document_.plan();
  if (!play || planned == nullptr) {
    playTimer_.stop();
    act_->play->setChecked(false);
    return;
  }
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
  for (const QUrl& url : event->mimeData()->urls()) {
    if (!url.isLocalFile()) continue;
    event->acceptProposedAction();
    if (url.toLocalFile().endsWith(QStringLiteral(".json"), Qt::CaseInsensitive)) {
      document_.loadLimits(url.toLocalFile());
    } else {
      openDrawing(url.toLocalFile());
    }
    return;
  }
}

void MainWindow::closeEvent(QCloseEvent* event) {
  settings_.set(Key::windowGeometry, saveGeometry());
  event->accept();
}

}  // namespace kf::ui
