// The limits, each with a number, a slider and a way to switch it off.
// Units as shown beside each number.
#include "ui/panels/limits_panel.h"

#include <QCheckBox>
#include <QDoubleSpinBox>
#include <QGridLayout>
#include <QLabel>
#include <QScrollArea>
#include <QSignalBlocker>
#include <QSlider>
#include <QVBoxLayout>
#include <algorithm>
#include <cmath>

namespace kf::ui {
namespace {

constexpr int kSliderReach = 1000;      // steps on each side of the middle
constexpr double kSliderFactor = 10.0;  // the ends are so many times less and more than the middle

QString qt(std::string_view text) {
  return QString::fromUtf8(text.data(), static_cast<qsizetype>(text.size()));
}

// What a limit starts with when it is switched on and never had a value.
double startValue(const limits::Field& field) {
  if (field.name.find("jerk") != std::string_view::npos) return 20'000.0;
  if (field.name.find("acceleration") != std::string_view::npos) return 1000.0;
  if (field.name.find("mm_per_min") != std::string_view::npos) return 6000.0;
  if (field.name == "control.block_period_ms") return 1.0;
  if (field.name == "control.lookahead_blocks") return 100.0;
  if (field.name == "control.position_gain_per_s") return 50.0;
  if (field.name == "tool.diameter_mm") return 6.0;
  if (field.name == "tool.teeth") return 2.0;
  if (field.name == "tool.spindle_rpm") return 12'000.0;
  if (field.name == "tool.feed_per_tooth_mm") return 0.1;
  if (field.name == "tool.radial_depth_mm") return 1.0;
  return 0.02;
}

QString groupTitle(std::string_view group) {
  if (group == "axes") return LimitsPanel::tr("Axes");
  if (group == "path") return LimitsPanel::tr("Along the path");
  if (group == "control") return LimitsPanel::tr("Control");
  return LimitsPanel::tr("Tool and cut");
}

bool isRequired(const limits::Field& field) {
  return field.name == "path.feed_mm_per_min" ||
         (field.group == "axes" && field.name.find("jerk") == std::string_view::npos);
}

// A drag in whole logarithmic steps lands on round numbers: three digits.
double rounded(double value) {
  const double power = std::pow(10.0, std::floor(std::log10(value)) - 2.0);
  return std::round(value / power) * power;
}

}  // namespace

LimitsPanel::LimitsPanel(Document& document, QWidget* parent) : QWidget(parent), document_(document) {
  auto* outer = new QVBoxLayout(this);
  outer->setContentsMargins(6, 4, 6, 4);
  name_ = new QLabel(this);
  name_->setTextFormat(Qt::PlainText);
  name_->setWordWrap(true);
  QFont bold = name_->font();
  bold.setBold(true);
  name_->setFont(bold);
  outer->addWidget(name_);
  example_ =
      new QLabel(tr("These are example limits, not your machine's. Enter your own before you cut."), this);
  example_->setWordWrap(true);
  example_->setStyleSheet(QStringLiteral("background:#fff3d6; color:#5b3a00; padding:4px;"));
  outer->addWidget(example_);
  auto* scroll = new QScrollArea(this);
  scroll->setWidgetResizable(true);
  scroll->setFrameShape(QFrame::NoFrame);
  scroll->setHorizontalScrollBarPolicy(Qt::ScrollBarAlwaysOff);
  auto* body = new QWidget(scroll);
  auto* grid = new QGridLayout(body);
  grid->setContentsMargins(0, 0, 4, 0);
  grid->setVerticalSpacing(3);
  grid->setColumnStretch(2, 1);
  int line = 0;
  std::string_view group;
  rows_.reserve(limits::fields().size());
  for (const limits::Field& field : limits::fields()) {
    if (field.group != group) {
      group = field.group;
      auto* title = new QLabel(groupTitle(group), body);
      title->setFont(bold);
      grid->addWidget(title, line++, 0, 1, 4);
    }
    addRow(*grid, line++, field);
  }
  grid->setRowStretch(line, 1);
  scroll->setWidget(body);
  outer->addWidget(scroll, 1);
  connect(&document_, &Document::limitsChanged, this, &LimitsPanel::refresh);
  connect(&document_, &Document::unitsChanged, this, &LimitsPanel::refresh);
  refresh();
}

void LimitsPanel::addRow(QGridLayout& grid, int line, const limits::Field& field) {
  const std::size_t index = rows_.size();
  Row row;
  row.field = &field;
  QWidget* parent = grid.parentWidget();
  if (isRequired(field)) {
    row.label = new QLabel(qt(field.label), parent);
    row.label->setToolTip(tr("A plan needs this limit"));
  } else {
    row.on = new QCheckBox(qt(field.label), parent);
    row.on->setObjectName(qt(field.name) + QStringLiteral(".on"));
    row.on->setToolTip(tr("Off: no limit"));
  }
  row.number = new QDoubleSpinBox(parent);
  row.number->setObjectName(qt(field.name));
  row.number->setAccessibleName(qt(field.label));
  row.number->setKeyboardTracking(false);
  row.number->setRange(1e-6, 1e9);
  row.number->setStepType(QAbstractSpinBox::AdaptiveDecimalStepType);
  row.number->setMinimumWidth(96);
  row.number->setMaximumWidth(110);
  row.number->setLocale(QLocale::c());
  row.slider = new QSlider(Qt::Horizontal, parent);
  row.slider->setObjectName(qt(field.name) + QStringLiteral(".slider"));
  row.slider->setAccessibleName(tr("%1, slider").arg(qt(field.label)));
  row.slider->setRange(-kSliderReach, kSliderReach);
  row.slider->setPageStep(kSliderReach / 20);
  row.slider->setMinimumWidth(60);
  row.unit = new QLabel(parent);
  row.unit->setMinimumWidth(52);
  row.remembered = startValue(field);
  grid.addWidget(row.on != nullptr ? static_cast<QWidget*>(row.on) : row.label, line, 0);
  if (row.label != nullptr) row.label->setBuddy(row.number);
  grid.addWidget(row.number, line, 1);
  grid.addWidget(row.slider, line, 2);
  grid.addWidget(row.unit, line, 3);
  rows_.push_back(row);
  if (row.on != nullptr)
    connect(row.on, &QCheckBox::toggled, this, [this, index](bool on) {
      if (refreshing_) return;
      Row& r = rows_[index];
      document_.setField(*r.field, on ? std::optional<double>(r.remembered) : std::nullopt);
    });
  connect(row.number, &QDoubleSpinBox::valueChanged, this, [this, index](double shown) {
    if (refreshing_) return;
    change(index, shown / shownFactor(qt(rows_[index].field->unit), document_.units()));
  });
  connect(row.slider, &QSlider::valueChanged, this, [this, index](int step) {
    if (refreshing_) return;
    const Row& r = rows_[index];
    const double value = r.pivot * std::pow(kSliderFactor, static_cast<double>(step) / kSliderReach);
    change(index, r.field->integer ? std::max(1.0, std::round(value)) : rounded(value));
  });
  // The middle stays while a drag lasts, and follows the value afterwards.
  connect(row.slider, &QSlider::sliderReleased, this, [this, index] {
    rows_[index].pivot = 0.0;
    refresh();
  });
}

void LimitsPanel::change(std::size_t index, double fileValue) {
  Row& row = rows_[index];
  if (row.field->integer) fileValue = std::round(fileValue);
  row.remembered = fileValue;
  document_.setField(*row.field, fileValue);
}

void LimitsPanel::refresh() {
  refreshing_ = true;
  const limits::Limits& limits = document_.limits();
  name_->setText(limits.name.empty() ? tr("Limits without a name") : QString::fromStdString(limits.name));
  example_->setVisible(limits.example);
  for (Row& row : rows_) {
    const std::optional<double> value = row.field->get(limits);
    const double factor = shownFactor(qt(row.field->unit), document_.units());
    if (value) row.remembered = *value;
    if (row.on != nullptr) row.on->setChecked(value.has_value());
    row.number->setEnabled(row.on == nullptr || value);
    row.slider->setEnabled(row.on == nullptr || value);
    const double shown = row.remembered * factor;
    row.number->setDecimals(row.field->integer ? 0
                            : shown >= 100.0   ? (factor == 1.0 ? 0 : 1)
                            : shown >= 1.0     ? 2
                                               : 4);
    // A number that the few decimals can't show exactly gets more of them.
    while (row.number->decimals() < 6 &&
           std::abs(std::round(shown * std::pow(10.0, row.number->decimals())) /
                        std::pow(10.0, row.number->decimals()) -
                    shown) > 1e-9 * shown &&
           factor == 1.0) {
      row.number->setDecimals(row.number->decimals() + 1);
    }
    if (!row.number->hasFocus() || std::abs(row.number->value() - shown) > 1e-9 * shown)
      row.number->setValue(shown);
    row.unit->setText(shownUnit(qt(row.field->unit), document_.units()));
    if (!row.slider->isSliderDown()) {
      if (!(row.pivot > 0.0) || row.remembered > row.pivot * 0.98 * kSliderFactor ||
          row.remembered < row.pivot / (0.98 * kSliderFactor)) {
        row.pivot = row.remembered;
      }
      row.slider->setValue(static_cast<int>(
          std::lround(kSliderReach * std::log(row.remembered / row.pivot) / std::log(kSliderFactor))));
    }
  }
  refreshing_ = false;
}

}  // namespace kf::ui
