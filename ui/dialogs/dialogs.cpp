// Questions to the user.
// Units as shown.
#include "ui/dialogs/dialogs.h"

#include <QCheckBox>
#include <QComboBox>
#include <QDialogButtonBox>
#include <QDir>
#include <QDoubleSpinBox>
#include <QFileDialog>
#include <QFileInfo>
#include <QFormLayout>
#include <QHBoxLayout>
#include <QLabel>
#include <QLineEdit>
#include <QMessageBox>
#include <QPushButton>
#include <QVBoxLayout>
#include <cmath>

namespace kf::ui {
namespace {

// In the order of the box: how rows are placed, their unit, the usual step.
struct Way {
  pipeline::Sampling sampling;
  const char* label;
  const char* unit;
  double step;
};
constexpr Way kWays[] = {
    {pipeline::Sampling::time, QT_TRANSLATE_NOOP("kf::ui::PointsDialog", "equal times"), "s", 0.001},
    {pipeline::Sampling::length, QT_TRANSLATE_NOOP("kf::ui::PointsDialog", "equal lengths"), "mm", 0.5},
    {pipeline::Sampling::chord, QT_TRANSLATE_NOOP("kf::ui::PointsDialog", "chord error"), "mm", 0.005},
};

}  // namespace

std::optional<double> askUnits(QWidget* parent, const QString& file) {
  QMessageBox box(
      QMessageBox::Question, QObject::tr("Unit of the drawing"),
      QObject::tr("%1 does not say its unit. What is it drawn in?").arg(QFileInfo(file).fileName()),
      QMessageBox::Cancel, parent);
  box.setObjectName(QStringLiteral("unitsBox"));
  QAbstractButton* mm = box.addButton(QObject::tr("&Millimetres"), QMessageBox::AcceptRole);
  QAbstractButton* inch = box.addButton(QObject::tr("&Inches"), QMessageBox::AcceptRole);
  mm->setObjectName(QStringLiteral("mm"));
  inch->setObjectName(QStringLiteral("inches"));
  box.exec();
  if (box.clickedButton() == mm) return 1.0;
  if (box.clickedButton() == inch) return 25.4;
  return std::nullopt;
}

bool askGoOnWithout(QWidget* parent, const QString& message) {
  QMessageBox box(QMessageBox::Warning, QObject::tr("Not everything can be used"), message,
                  QMessageBox::Cancel, parent);
  box.setObjectName(QStringLiteral("skipBox"));
  box.setTextFormat(Qt::PlainText);
  QAbstractButton* go = box.addButton(QObject::tr("&Go on without them"), QMessageBox::AcceptRole);
  go->setObjectName(QStringLiteral("goOn"));
  box.exec();
  return box.clickedButton() == go;
}

QString cautionText() {
  return QObject::tr(
      "What is exported has not been proven on your machine.\n\n"
      "\u2022 Check the limits against the machine builder's data.\n"
      "\u2022 Guards closed; verify offsets and clearances.\n"
      "\u2022 Dry run clear of the work: single block, low feed override, a hand at feed hold.\n"
      "\u2022 Local law, the machine's manual and qualified people come first.\n\n"
      "Standards to defer to: ISO 12100:2010, ISO 16090-1:2022, ISO 13849-1, IEC 60204-1, ANSI B11 series, "
      "29 CFR 1910.212. "
      "No conformity is claimed.");
}

bool acceptCautions(QWidget* parent, const limits::Limits& limits, Settings& settings) {
  // The numbers are part of the key: changed limits are to be checked again when they claim to be examples.
  const QString key = QString::fromStdString(limits.example ? limits::toJson(limits) : limits.name);
  QStringList confirmed = settings.value(Key::confirmedLimits).toStringList();
  if (confirmed.contains(key)) return true;
  QMessageBox box(QMessageBox::Warning, QObject::tr("Before you run this"), cautionText(),
                  QMessageBox::Cancel, parent);
  box.setObjectName(QStringLiteral("cautionBox"));
  QPushButton* accept = box.addButton(QObject::tr("I have &read this"), QMessageBox::AcceptRole);
  accept->setObjectName(QStringLiteral("accept"));
  QCheckBox* checked = nullptr;
  if (limits.example) {
    checked = new QCheckBox(
        QObject::tr("These are example limits. I have checked each of them against my machine."), &box);
    checked->setObjectName(QStringLiteral("checked"));
    box.setCheckBox(checked);
    accept->setEnabled(false);
    QObject::connect(checked, &QCheckBox::toggled, accept, &QWidget::setEnabled);
  }
  box.exec();
  if (box.clickedButton() != accept) return false;
  confirmed.append(key);
  settings.set(Key::confirmedLimits, confirmed);
  return true;
}

PointsDialog::PointsDialog(const Document& document, Settings& settings, QWidget* parent)
    : QDialog(parent), settings_(settings), document_(document) {
  setWindowTitle(tr("Export point list"));
  setObjectName(QStringLiteral("pointsDialog"));
  auto* layout = new QVBoxLayout(this);
  auto* form = new QFormLayout;
  layout->addLayout(form);
  contours_ = new QComboBox(this);
  contours_->addItem(tr("all %1").arg(document.contourCount()));
  contours_->addItem(tr("the chosen one (%1)").arg(document.chosen() + 1));
  if (document.contourCount() == 1) contours_->setEnabled(false);
  form->addRow(tr("&Contours"), contours_);
  sampling_ = new QComboBox(this);
  sampling_->setObjectName(QStringLiteral("sampling"));
  for (const Way& way : kWays) sampling_->addItem(tr(way.label));
  form->addRow(tr("&Rows by"), sampling_);
  auto* stepRow = new QHBoxLayout;
  step_ = new QDoubleSpinBox(this);
  step_->setObjectName(QStringLiteral("step"));
  step_->setLocale(QLocale::c());
  step_->setDecimals(6);
  step_->setRange(1e-6, 1e6);
  step_->setStepType(QAbstractSpinBox::AdaptiveDecimalStepType);
  unit_ = new QLabel(this);
  stepRow->addWidget(step_, 1);
  stepRow->addWidget(unit_);
  form->addRow(tr("&Step"), stepRow);
  count_ = new QLabel(this);
  form->addRow(QString(), count_);
  auto* pathRow = new QHBoxLayout;
  path_ = new QLineEdit(this);
  path_->setObjectName(QStringLiteral("path"));
  path_->setMinimumWidth(360);
  auto* browseButton = new QPushButton(tr("&Browse\u2026"), this);
  pathRow->addWidget(path_, 1);
  pathRow->addWidget(browseButton);
  form->addRow(tr("&File"), pathRow);
  auto* note = new QLabel(tr("Coordinates are in mm and feeds in mm/min, whatever the window shows. The file "
                             "is read back before it is handed over."),
                          this);
  note->setWordWrap(true);
  layout->addWidget(note);
  auto* buttons = new QDialogButtonBox(QDialogButtonBox::Save | QDialogButtonBox::Cancel, this);
  layout->addWidget(buttons);
  connect(buttons, &QDialogButtonBox::accepted, this, &QDialog::accept);
  connect(buttons, &QDialogButtonBox::rejected, this, &QDialog::reject);
  connect(browseButton, &QPushButton::clicked, this, &PointsDialog::browse);
  connect(sampling_, &QComboBox::currentIndexChanged, this, &PointsDialog::refreshStep);
  const auto recount = [this] {
    double extent = 0.0;
    for (int i = 0; i < document_.contourCount(); ++i) {
      const auto* planned = document_.planAt(i);
      if (planned == nullptr || (onlyChosen() && i != document_.chosen())) continue;
      extent += kWays[sampling_->currentIndex()].sampling == pipeline::Sampling::time ? planned->plan.time
                                                                                      : planned->facts.length;
    }
    const bool chord = kWays[sampling_->currentIndex()].sampling == pipeline::Sampling::chord;
    count_->setText(
        chord ? tr("rows where the bend asks for them")
              : tr("about %1 rows").arg(QLocale::c().toString(std::ceil(extent / step_->value()), 'f', 0)));
  };
  connect(step_, &QDoubleSpinBox::valueChanged, this, recount);
  connect(contours_, &QComboBox::currentIndexChanged, this, recount);
  connect(sampling_, &QComboBox::currentIndexChanged, this, recount);
  refreshStep();
  recount();
  const QString folder = settings.value(Key::lastFolder).toString();
  const QString stem = document.isEmpty()
                           ? QStringLiteral("points")
                           : QFileInfo(QString::fromStdString(document.drawing()->name)).completeBaseName();
  path_->setText(
      QDir(folder.isEmpty() ? QDir::homePath() : folder).filePath(stem + QStringLiteral("_points.csv")));
}

void PointsDialog::refreshStep() {
  const Way& way = kWays[sampling_->currentIndex()];
  unit_->setText(QLatin1String(way.unit));
  step_->setValue(way.step);
}

void PointsDialog::browse() {
  const QString path =
      QFileDialog::getSaveFileName(this, tr("Export point list"), path_->text(), tr("Point lists (*.csv)"),
                                   nullptr, QFileDialog::DontConfirmOverwrite);
  if (!path.isEmpty()) path_->setText(path);
}

pipeline::PointListRequest PointsDialog::request() const {
  pipeline::PointListRequest request;
  request.outputPath = path_->text().toStdString();
  request.sampling = kWays[sampling_->currentIndex()].sampling;
  request.step = step_->value();
  return request;
}

bool PointsDialog::onlyChosen() const {
  return contours_->currentIndex() == 1;
}
void PointsDialog::setPath(const QString& path) {
  path_->setText(path);
}

}  // namespace kf::ui
