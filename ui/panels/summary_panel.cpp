// Total time, the bound that no plan beats, and the place under the cursor.
// Units in the text.
#include "ui/panels/summary_panel.h"

#include <QHBoxLayout>
#include <QLabel>
#include <QVBoxLayout>
#include <algorithm>
#include <cmath>
#include <limits>

#include "ui/format/colours.h"

namespace kf::ui {
namespace {

const QString kNothing = QStringLiteral("\u2013");

bool hasJerkLimit(const limits::Limits& limits) {
  return limits.x.jerk || limits.y.jerk || limits.tangentialJerk;
}

}  // namespace

SummaryPanel::SummaryPanel(Document& document, QWidget* parent) : QWidget(parent), document_(document) {
  auto* layout = new QVBoxLayout(this);
  layout->setContentsMargins(10, 4, 8, 6);
  layout->setSpacing(1);
  auto* top = new QHBoxLayout;
  top->setSpacing(10);
  time_ = new QLabel(this);
  time_->setObjectName(QStringLiteral("totalTime"));
  time_->setAccessibleName(tr("Total time"));
  QFont big = time_->font();
  big.setPointSizeF(big.pointSizeF() * 2.1);
  big.setBold(true);
  time_->setFont(big);
  top->addWidget(time_);
  working_ = new QLabel(tr("working\u2026"), this);
  working_->setObjectName(QStringLiteral("working"));
  working_->setStyleSheet(QStringLiteral("color:#0072B2;"));
  top->addWidget(working_);
  top->addStretch(1);
  layout->addLayout(top);
  const auto line = [&](const char* name) {
    auto* label = new QLabel(this);
    label->setObjectName(QLatin1String(name));
    label->setWordWrap(true);
    layout->addWidget(label);
    return label;
  };
  bound_ = line("lowerBound");
  scope_ = line("scope");
  compare_ = line("comparison");
  problem_ = line("problem");
  problem_->setTextFormat(Qt::PlainText);
  problem_->setStyleSheet(
      QStringLiteral("background:#fbe3da; color:#6b1d00; padding:4px; border-left:4px solid #D55E00;"));
  for (auto signal : {&Document::opened, &Document::plansChanged, &Document::referenceChanged,
                      &Document::planningChanged, &Document::choicesChanged, &Document::unitsChanged})
    connect(&document_, signal, this, &SummaryPanel::refresh);
  refresh();
}

void SummaryPanel::refresh() {
  const double time = document_.totalTime(), least = document_.totalLowerBound();
  const bool planned = time > 0.0;
  time_->setText(planned ? timeText(time) : kNothing);
  time_->setVisible(planned || !document_.isEmpty());
  working_->setText(document_.isRefining() ? tr("quick plan without jerk; refining\u2026")
                                           : tr("working\u2026"));
  working_->setVisible(document_.isPlanning());
  if (planned) {
    const double gap = least > 0.0 ? 100.0 * (time / least - 1.0) : 0.0;
    const QString shown = gap < 0.00005 ? tr("below 0.0001") : QString::number(gap, 'f', gap < 0.1 ? 4 : 2);
    bound_->setText(
        tr("No plan under these limits beats <b>%1</b>; gap <b>%2 %</b>").arg(timeText(least), shown));
  } else {
    bound_->setText(document_.isEmpty() ? tr("No drawing is open") : QString());
  }
  bound_->setToolTip(
      tr("The fastest motion under the same limits, worked out on the same nodes, takes at least this long"));
  QString scope;
  if (planned) {
    double length = 0.0;
    for (int i = 0; i < document_.contourCount(); ++i) {
      if (document_.planAt(i) != nullptr) length += document_.planAt(i)->facts.length;
    }
    scope = tr("%1, %2 long, mean %3")
                .arg(document_.contourCount() == 1 ? tr("One contour")
                                                   : tr("%1 contours").arg(document_.contourCount()),
                     lengthText(length, document_.units()), feedText(length / time, document_.units()));
  }
  scope_->setText(scope);
  scope_->setVisible(planned);
  refreshComparison(planned);
  refreshProblem();
}

void SummaryPanel::refreshComparison(bool planned) {
  double pinned = 0.0;
  for (const auto& plan : document_.reference()) pinned += plan ? plan->plan.time : 0.0;
  compare_->setVisible(pinned > 0.0 && planned);
  const double change = document_.totalTime() - pinned;
  const double percent = pinned > 0.0 ? 100.0 * std::abs(change) / pinned : 0.0;
  if (std::abs(change) < 5e-4) {
    compare_->setText(tr("Pinned plan %1: no difference").arg(timeText(pinned)));
    return;
  }
  compare_->setText(tr("Pinned plan %1: now %2 %3 s (%4 %)")
                        .arg(timeText(pinned), change <= 0.0 ? tr("shorter by") : tr("longer by"),
                             timeNumber(std::abs(change)), QString::number(percent, 'f', 1)));
}

void SummaryPanel::refreshProblem() {
  QStringList lines;
  if (!document_.isEmpty()) {
    if (!document_.planError().isEmpty()) lines << document_.planError();
    if (document_.law() == plan::Law::acceleration && hasJerkLimit(document_.limits()))
      lines << tr("This plan does not hold the jerk limits: it is made within speed and acceleration only.");
    std::size_t places = 0;
    double deepest = 0.0;
    for (int i = 0; i < document_.contourCount(); ++i) {
      const auto* prepared = document_.preparedAt(i);
      if (prepared == nullptr || !prepared->drive) continue;
      places += prepared->drive->uncut.size();
      for (const construct::UncutPlace& place : prepared->drive->uncut)
        deepest = std::max(deepest, place.depth);
    }
    if (places > 0)
      lines << tr("The tool does not reach %1 places of the drawing; up to %2 stays there.")
                   .arg(places)
                   .arg(lengthText(deepest, document_.units()));
  }
  problem_->setVisible(!lines.isEmpty());
  problem_->setText(lines.join(u'\n'));
}

CursorReadout::CursorReadout(Document& document, QWidget* parent) : QWidget(parent), document_(document) {
  setAccessibleName(tr("At the cursor"));
  auto* layout = new QHBoxLayout(this);
  layout->setContentsMargins(10, 3, 8, 3);
  layout->setSpacing(5);
  layout->setSizeConstraint(QLayout::SetNoConstraint);  // refit() sees to the width
  const QString heads[] = {tr("At"),    QStringLiteral("x"), QStringLiteral("y"), tr("Radius"),
                           tr("Speed"), tr("Time"),          tr("Limited by")};
  for (std::size_t i = 0; i < values_.size(); ++i) {
    QLabel* head = heads_[i] = new QLabel(heads[i], this);
    head->setStyleSheet(QStringLiteral("color:#5c6470;"));
    layout->addWidget(head);
    if (i + 1 == values_.size()) {
      swatch_ = new QLabel(this);
      swatch_->setFixedSize(12, 12);
      layout->addWidget(swatch_);
    }
    values_[i] = new QLabel(kNothing, this);
    values_[i]->setAccessibleName(heads[i]);
    QFont bold = values_[i]->font();
    bold.setBold(true);
    values_[i]->setFont(bold);
    // Room for the widest usual value, so that the line does not dance while the cursor moves.
    if (i + 1 < values_.size()) {
      const QString widest = i == 3   ? QStringLiteral("000.0000 mm")
                             : i == 4 ? QStringLiteral("00000 mm/min")
                                      : QStringLiteral("0000.000 mm");
      values_[i]->setMinimumWidth(
          QFontMetrics(bold).horizontalAdvance(i == 1 || i == 2 ? "-000.000" : widest));
    }
    layout->addWidget(values_[i]);
  }
  layout->addStretch(1);
  for (auto signal : {&Document::cursorChanged, &Document::plansChanged, &Document::unitsChanged})
    connect(&document_, signal, this, &CursorReadout::refresh);
  refresh();
}

// Where the line is too narrow for all of it, time and coordinates give way: the rest matters more.
void CursorReadout::refit() {
  constexpr std::size_t kGiveWay[] = {5, 2, 1, 0};
  std::array<bool, 7> shown{};
  shown.fill(true);
  const auto needed = [&] {
    int sum = 60;
    for (std::size_t i = 0; i < values_.size(); ++i) {
      if (shown[i])
        sum += heads_[i]->sizeHint().width() +
               std::max(values_[i]->minimumWidth(), values_[i]->sizeHint().width()) + 10;
    }
    return sum;
  };
  for (std::size_t i : kGiveWay) {
    if (needed() <= width()) break;
    shown[i] = false;
  }
  for (std::size_t i = 0; i < values_.size(); ++i) {
    heads_[i]->setVisible(shown[i]);
    values_[i]->setVisible(shown[i]);
  }
}

void CursorReadout::resizeEvent(QResizeEvent* event) {
  QWidget::resizeEvent(event);
  refit();
}

QString CursorReadout::text() const {
  QStringList parts;
  for (const QLabel* value : values_) parts << value->accessibleName() + u' ' + value->text();
  return parts.join(QStringLiteral(", "));
}

void CursorReadout::refresh() {
  const auto* planned = document_.plan();
  swatch_->setVisible(planned != nullptr && document_.cursor().has_value());
  if (planned == nullptr || !document_.cursor()) {
    for (QLabel* value : values_) value->setText(kNothing);
    return;
  }
  const Units units = document_.units();
  const path::Sample p = planned->path->sample(*document_.cursor());
  const schedule::State state = planned->plan.schedule.atLength(*document_.cursor());
  const double radius = std::abs(p.k) < 1e-6 ? std::numeric_limits<double>::infinity() : 1.0 / std::abs(p.k);
  const QString texts[] = {lengthText(*document_.cursor(), units),
                           lengthNumber(p.x, units),
                           lengthNumber(p.y, units),
                           std::isfinite(radius) ? lengthText(radius, units) : tr("straight"),
                           feedText(state.v, units),
                           timeNumber(state.t) + QStringLiteral(" s"),
                           limitLabel(state.limitedBy)};
  for (std::size_t i = 0; i < values_.size(); ++i) values_[i]->setText(texts[i]);
  refit();
  swatch_->setStyleSheet(
      QStringLiteral("background:%1; border:1px solid #555;").arg(limitColour(state.limitedBy).name()));
}

}  // namespace kf::ui
