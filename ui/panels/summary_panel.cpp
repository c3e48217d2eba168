// Total time, the bound that no plan beats, and the place under the cursor.
// Units in the text.
#include "ui/panels/summary_panel.h"

#include <QHBoxLayout>
#include <QLabel>
#include <QVBoxLayout>
#include <cmath>
#include <limits>

#include "ui/format/colours.h"

namespace kf::ui {

SummaryPanel::SummaryPanel(Document& document, QWidget* parent) : QWidget(parent), document_(document) {
  auto* layout = new QVBoxLayout(this);
  layout->setContentsMargins(8, 6, 8, 6);
  layout->setSpacing(1);
  time_ = new QLabel(this);
  time_->setObjectName(QStringLiteral("totalTime"));
  QFont big = time_->font();
  big.setPointSizeF(big.pointSizeF() * 1.9);
  big.setBold(true);
  time_->setFont(big);
  bound_ = new QLabel(this);
  bound_->setObjectName(QStringLiteral("lowerBound"));
  bound_->setWordWrap(true);
  compare_ = new QLabel(this);
  compare_->setObjectName(QStringLiteral("comparison"));
  problem_ = new QLabel(this);
  problem_->setObjectName(QStringLiteral("problem"));
  problem_->setWordWrap(true);
  problem_->setTextFormat(Qt::PlainText);
  problem_->setStyleSheet(QStringLiteral("background:#fbe3da; color:#6b1d00; padding:4px;"));
  for (QLabel* label : {time_, bound_, compare_, problem_}) layout->addWidget(label);
  for (auto signal : {&Document::opened, &Document::plansChanged, &Document::referenceChanged})
    connect(&document_, signal, this, &SummaryPanel::refresh);
  refresh();
}

void SummaryPanel::refresh() {
  const bool planned = document_.totalTime() > 0.0;
  time_->setText(planned ? timeText(document_.totalTime()) : QStringLiteral("\u2013"));
  QString bound;
  if (planned) {
    const double gap = 100.0 * (document_.totalTime() / document_.totalLowerBound() - 1.0);
    const QString scope =
        document_.contourCount() == 1 ? tr("one contour") : tr("%1 contours").arg(document_.contourCount());
    bound =
        tr("%1. No plan on these nodes beats %2: gap %3 %")
            .arg(scope, timeText(document_.totalLowerBound()), QString::number(gap, 'f', gap < 0.1 ? 4 : 2));
  } else if (document_.isEmpty()) {
    bound = tr("No drawing is open");
  }
  bound_->setText(bound);
  bound_->setToolTip(
      tr("The fastest motion under the same limits, worked out on the same nodes, takes at least this long"));
  double pinned = 0.0;
  for (const auto& plan : document_.reference()) pinned += plan ? plan->plan.time : 0.0;
  compare_->setVisible(pinned > 0.0 && planned);
  const double change = document_.totalTime() - pinned;
  compare_->setText(tr("Pinned plan %1: now %2 %3 s")
                        .arg(timeText(pinned), change <= 0.0 ? tr("shorter by") : tr("longer by"),
                             timeNumber(std::abs(change))));
  problem_->setVisible(!document_.planError().isEmpty() && !document_.isEmpty());
  problem_->setText(document_.planError());
}

CursorReadout::CursorReadout(Document& document, QWidget* parent) : QWidget(parent), document_(document) {
  auto* layout = new QHBoxLayout(this);
  layout->setContentsMargins(8, 2, 8, 2);
  label_ = new QLabel(this);
  label_->setObjectName(QStringLiteral("readout"));
  label_->setMinimumWidth(10);
  layout->addWidget(label_);
  for (auto signal : {&Document::cursorChanged, &Document::plansChanged, &Document::unitsChanged})
    connect(&document_, signal, this, &CursorReadout::refresh);
  refresh();
}

QString CursorReadout::text() const {
  return label_->text();
}

void CursorReadout::refresh() {
  const auto* planned = document_.plan();
  if (planned == nullptr || !document_.cursor()) {
    label_->setText(document_.isEmpty() ? QString() : tr("Point at the contour or the plot to read it"));
    return;
  }
  const Units units = document_.units();
  const path::Sample p = planned->path->sample(*document_.cursor());
  const schedule::State state = planned->plan.schedule.atLength(*document_.cursor());
  const double radius = std::abs(p.k) < 1e-6 ? std::numeric_limits<double>::infinity() : 1.0 / std::abs(p.k);
  const bool straight = !std::isfinite(radius);
  label_->setText(tr("at %1   x %2   y %3   %4   speed %5   time %6 s   limited by %7")
                      .arg(lengthText(*document_.cursor(), units), lengthNumber(p.x, units),
                           lengthNumber(p.y, units),
                           straight ? tr("straight") : tr("radius %1").arg(lengthText(radius, units)),
                           feedText(state.v, units), timeNumber(state.t), limitLabel(state.limitedBy)));
}

}  // namespace kf::ui
