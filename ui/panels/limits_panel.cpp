// The limits, each with a number, a slider and a way to switch it off.
// Units as shown beside each number.
#include "ui/panels/limits_panel.h"

#include <QCheckBox>
#include <QComboBox>
#include <QDoubleSpinBox>
#include <QGridLayout>
#include <QHBoxLayout>
#include <QLabel>
#include <QLineEdit>
#include <QPushButton>
#include <QScrollArea>
#include <QSlider>
#include <QVBoxLayout>
#include <QWheelEvent>
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
  if (group == "moves") return LimitsPanel::tr("Moves between contours");
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

// The wheel scrolls the panel; it changes a number only after a click into it.
class CalmWheel : public QObject {
 public:
  using QObject::QObject;
  bool eventFilter(QObject* watched, QEvent* event) override {
    if (event->type() != QEvent::Wheel || static_cast<QWidget*>(watched)->hasFocus()) return false;
    event->ignore();
    return true;
  }
};

}  // namespace

LimitsPanel::LimitsPanel(Document& document, QWidget* parent) : QWidget(parent), document_(document) {
  makeHead();
  auto* scroll = new QScrollArea(this);
  scroll->setWidgetResizable(true);
  scroll->setFrameShape(QFrame::NoFrame);
  scroll->setHorizontalScrollBarPolicy(Qt::ScrollBarAlwaysOff);
  scroll->setFocusPolicy(Qt::NoFocus);
  auto* body = new QWidget(scroll);
  auto* grid = new QGridLayout(body);
  grid->setContentsMargins(0, 0, 6, 0);
  grid->setVerticalSpacing(2);
  grid->setHorizontalSpacing(8);
  grid->setColumnStretch(2, 1);
  int line = 0;
  addChoices(*grid, line);
  QFont bold = font();
  bold.setBold(true);
  std::string_view group;
  rows_.reserve(limits::fields().size());
  for (const limits::Field& field : limits::fields()) {
    if (field.group != group) {
      group = field.group;
      auto* title = new QLabel(groupTitle(group), body);
      title->setFont(bold);
      title->setContentsMargins(0, 6, 0, 0);
      grid->addWidget(title, line++, 0, 1, 4);
    }
    addRow(*grid, line++, field);
    if (field.name == "tool.diameter_mm") addSide(*grid, line++);
  }
  grid->setRowStretch(line, 1);
  scroll->setWidget(body);
  static_cast<QVBoxLayout*>(layout())->addWidget(scroll, 1);
  for (auto signal : {&Document::limitsChanged, &Document::unitsChanged, &Document::choicesChanged})
    connect(&document_, signal, this, &LimitsPanel::refresh);
  refresh();
}

void LimitsPanel::makeHead() {
  auto* outer = new QVBoxLayout(this);
  outer->setContentsMargins(8, 4, 2, 4);
  outer->setSpacing(4);
  name_ = new QLineEdit(this);
  name_->setObjectName(QStringLiteral("limitsName"));
  name_->setAccessibleName(tr("Name of the limits"));
  name_->setPlaceholderText(tr("Name of the machine"));
  name_->setToolTip(tr("The name that goes into the limits file"));
  connect(name_, &QLineEdit::editingFinished, this, [this] {
    if (!refreshing_) document_.setLimitsName(name_->text());
  });
  outer->addWidget(name_);
  example_ = new QWidget(this);
  example_->setObjectName(QStringLiteral("exampleBanner"));
  example_->setAttribute(Qt::WA_StyledBackground);
  example_->setStyleSheet(
      QStringLiteral("#exampleBanner { background:#fff3d6; border-left:4px solid #E69F00; } "
                     "#exampleBanner QLabel { color:#5b3a00; }"));
  auto* inside = new QHBoxLayout(example_);
  inside->setContentsMargins(8, 3, 4, 3);
  auto* words =
      new QLabel(tr("Example limits, not your machine's. Enter your own before you cut."), example_);
  words->setWordWrap(true);
  inside->addWidget(words, 1);
  auto* mine = new QPushButton(tr("They are &mine now"), example_);
  mine->setObjectName(QStringLiteral("mine"));
  mine->setToolTip(tr("Press when every number below is your machine's own"));
  inside->addWidget(mine);
  connect(mine, &QPushButton::clicked, &document_, &Document::confirmLimitsAreMine);
  outer->addWidget(example_);
}

void LimitsPanel::addChoices(QGridLayout& grid, int& line) {
  QWidget* parent = grid.parentWidget();
  const auto add = [&](const QString& label, const QStringList& items, const QString& name) {
    auto* box = new QComboBox(parent);
    box->addItems(items);
    box->setObjectName(name);
    box->installEventFilter(new CalmWheel(box));
    box->setFocusPolicy(Qt::StrongFocus);
    auto* text = new QLabel(label, parent);
    text->setBuddy(box);
    grid.addWidget(text, line, 0);
    grid.addWidget(box, line++, 1, 1, 3);
    return box;
  };
  law_ =
      add(tr("Plan within"),
          {tr("jerk where a limit is given"), tr("speed and acceleration"), tr("speed, acceleration, jerk")},
          QStringLiteral("law"));
  joints_ = add(tr("Corners"), {tr("blend within the path tolerance"), tr("keep exact, stop there")},
                QStringLiteral("joints"));
  connect(law_, &QComboBox::activated, this, [this](int i) {
    document_.setLaw(i == 0   ? std::nullopt
                     : i == 1 ? std::optional(plan::Law::acceleration)
                              : std::optional(plan::Law::jerk));
  });
  connect(joints_, &QComboBox::activated, this,
          [this](int i) { document_.setJoints(i == 0 ? plan::Joints::blend : plan::Joints::exact); });
}

void LimitsPanel::addSide(QGridLayout& grid, int line) {
  QWidget* parent = grid.parentWidget();
  side_ = new QComboBox(parent);
  side_->setObjectName(QStringLiteral("tool.side"));
  side_->addItems({tr("on the line"), tr("left of the line"), tr("right of the line")});
  side_->installEventFilter(new CalmWheel(side_));
  side_->setFocusPolicy(Qt::StrongFocus);
  auto* label = new QLabel(tr("Tool runs"), parent);
  label->setBuddy(side_);
  grid.addWidget(label, line, 0);
  grid.addWidget(side_, line, 1, 1, 3);
  connect(side_, &QComboBox::activated, this,
          [this](int i) { document_.setSide(static_cast<limits::Side>(i)); });
}

void LimitsPanel::addRow(QGridLayout& grid, int line, const limits::Field& field) {
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
  row.number->setMinimumWidth(84);
  row.number->setMaximumWidth(110);
  row.number->setAlignment(Qt::AlignRight);
  row.number->setLocale(QLocale::c());
  row.number->setFocusPolicy(Qt::StrongFocus);
  row.number->installEventFilter(new CalmWheel(row.number));
  row.slider = new QSlider(Qt::Horizontal, parent);
  row.slider->setObjectName(qt(field.name) + QStringLiteral(".slider"));
  row.slider->setAccessibleName(tr("%1, slider").arg(qt(field.label)));
  row.slider->setRange(-kSliderReach, kSliderReach);
  row.slider->setPageStep(kSliderReach / 20);
  row.slider->setMinimumWidth(50);
  row.slider->setFocusPolicy(Qt::StrongFocus);
  row.slider->setToolTip(tr("Drag: from a tenth to ten times the value"));
  row.slider->installEventFilter(new CalmWheel(row.slider));
  row.unit = new QLabel(parent);
  row.unit->setMinimumWidth(48);
  row.remembered = startValue(field);
  grid.addWidget(row.on != nullptr ? static_cast<QWidget*>(row.on) : row.label, line, 0);
  if (row.label != nullptr) row.label->setBuddy(row.number);
  grid.addWidget(row.number, line, 1);
  grid.addWidget(row.slider, line, 2);
  grid.addWidget(row.unit, line, 3);
  rows_.push_back(row);
  connectRow(rows_.size() - 1);
}

void LimitsPanel::connectRow(std::size_t index) {
  const Row& row = rows_[index];
  if (row.on != nullptr) {
    connect(row.on, &QCheckBox::toggled, this, [this, index](bool on) {
      if (refreshing_) return;
      const Row& r = rows_[index];
      document_.endGesture();
      document_.setField(*r.field, on ? std::optional<double>(r.remembered) : std::nullopt);
    });
  }
  connect(row.number, &QDoubleSpinBox::valueChanged, this, [this, index](double shown) {
    if (refreshing_) return;
    change(index, shown / shownFactor(qt(rows_[index].field->unit), document_.units()));
  });
  connect(row.number, &QDoubleSpinBox::editingFinished, &document_, &Document::endGesture);
  connect(row.slider, &QSlider::sliderPressed, &document_, &Document::endGesture);
  connect(row.slider, &QSlider::valueChanged, this, [this, index](int step) {
    if (refreshing_) return;
    const Row& r = rows_[index];
    const double value = r.pivot * std::pow(kSliderFactor, static_cast<double>(step) / kSliderReach);
    change(index, r.field->integer ? std::max(1.0, std::round(value)) : rounded(value));
  });
  // The middle stays while a drag lasts, and follows the value afterwards.
  connect(row.slider, &QSlider::sliderReleased, this, [this, index] {
    document_.endGesture();
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
  if (name_->text() != QString::fromStdString(limits.name)) {
    name_->setText(QString::fromStdString(limits.name));
    name_->setCursorPosition(0);
  }
  example_->setVisible(limits.example);
  side_->setCurrentIndex(static_cast<int>(limits.side));
  const auto& choices = document_.choices();
  law_->setCurrentIndex(!choices.law ? 0 : *choices.law == plan::Law::acceleration ? 1 : 2);
  joints_->setCurrentIndex(choices.joints == plan::Joints::blend ? 0 : 1);
  for (Row& row : rows_) refreshRow(row);
  refreshing_ = false;
}

void LimitsPanel::refreshRow(Row& row) {
  const std::optional<double> value = row.field->get(document_.limits());
  const double factor = shownFactor(qt(row.field->unit), document_.units());
  if (value) row.remembered = *value;
  if (row.on != nullptr) row.on->setChecked(value.has_value());
  row.number->setEnabled(row.on == nullptr || value);
  row.slider->setEnabled(row.on == nullptr || value);
  const double shown = row.remembered * factor;
  int decimals = row.field->integer ? 0 : shown >= 100.0 ? (factor == 1.0 ? 0 : 1) : shown >= 1.0 ? 2 : 4;
  // A number that the few decimals can't show exactly gets more of them.
  const auto exact = [shown](int n) {
    const double power = std::pow(10.0, n);
    return std::abs(std::round(shown * power) / power - shown) <= 1e-9 * shown;
  };
  while (factor == 1.0 && decimals < 6 && !exact(decimals)) ++decimals;
  if (decimals != row.number->decimals()) row.number->setDecimals(decimals);
  if (!row.number->hasFocus() || std::abs(row.number->value() - shown) > 1e-9 * shown)
    row.number->setValue(shown);
  row.unit->setText(shownUnit(qt(row.field->unit), document_.units()));
  if (row.slider->isSliderDown()) return;
  if (!(row.pivot > 0.0) || row.remembered > row.pivot * 0.98 * kSliderFactor ||
      row.remembered < row.pivot / (0.98 * kSliderFactor)) {
    row.pivot = row.remembered;
  }
  row.slider->setValue(static_cast<int>(
      std::lround(kSliderReach * std::log(row.remembered / row.pivot) / std::log(kSliderFactor))));
}

}  // namespace kf::ui
