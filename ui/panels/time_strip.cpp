// Where the time goes, limit by limit, and what raising each would save.
// s.
#include "ui/panels/time_strip.h"

#include <QPainter>
#include <algorithm>

#include "ui/format/colours.h"

namespace kf::ui {
namespace {

constexpr int kBar = 20, kGap = 6;

}  // namespace

TimeStrip::TimeStrip(Document& document, QWidget* parent) : QWidget(parent), document_(document) {
  setAccessibleName(tr("Where the time goes"));
  for (auto signal : {&Document::opened, &Document::plansChanged, &Document::pricesChanged})
    connect(&document_, signal, this, qOverload<>(&QWidget::update));
}

QSize TimeStrip::sizeHint() const {
  return {500, kBar + kGap + 2 + 3 * (fontMetrics().height() + 1)};
}

// Over all contours: what has time first, then limits that cost time only through a price.
std::vector<TimeStrip::Share> TimeStrip::shares() const {
  std::vector<Share> list;
  for (LimitName name : allLimitNames()) {
    Share share{name, 0.0, 0.0, false};
    for (int i = 0; i < document_.contourCount(); ++i) {
      if (const auto* planned = document_.planAt(i))
        share.seconds += planned->plan.timeByLimit[static_cast<std::size_t>(name)];
    }
    for (const plan::Price& price : document_.prices()) {
      if (price.limit != name) continue;
      share.saved = price.timeSaved;
      share.priced = true;
    }
    if (share.seconds > 0.0 || share.saved > 5e-4) list.push_back(share);
  }
  std::stable_sort(list.begin(), list.end(),
                   [](const Share& a, const Share& b) { return a.seconds > b.seconds; });
  return list;
}

void TimeStrip::paintEvent(QPaintEvent* /*event*/) {
  QPainter painter(this);
  const std::vector<Share> list = shares();
  const double total = document_.totalTime();
  const QColor ink = palette().color(QPalette::WindowText);
  if (list.empty() || !(total > 0.0)) {
    painter.setPen(palette().color(QPalette::PlaceholderText));
    painter.drawText(rect(), Qt::AlignCenter, tr("Where the time goes shows here once a drawing is open"));
    return;
  }
  double x = 0.0;
  for (const Share& share : list) {
    const double w = share.seconds / total * width();
    const QRectF part(x, 0, w, kBar);
    painter.fillRect(part, limitColour(share.name));
    if (limitDash(share.name) != Qt::SolidLine)
      painter.fillRect(part,
                       QBrush(QColor(0, 0, 0, 90),
                              limitDash(share.name) == Qt::DashLine ? Qt::BDiagPattern : Qt::Dense6Pattern));
    painter.setPen(QPen(palette().color(QPalette::Window), 1));
    painter.drawLine(part.topRight(), part.bottomRight());
    x += w;
  }
  const int line = fontMetrics().height() + 1;
  int column = 0, row = 0;
  const int columns = std::max(1, width() / 430), columnWidth = width() / columns;
  for (const Share& share : list) {
    if (row >= 3) break;
    const int left = column * columnWidth, top = kBar + kGap + row * line;
    const QRect swatch(left, top + line / 2 - 5, 18, 9);
    painter.fillRect(swatch, limitColour(share.name));
    if (limitDash(share.name) != Qt::SolidLine)
      painter.fillRect(swatch, QBrush(QColor(0, 0, 0, 90), Qt::BDiagPattern));
    painter.setPen(ink);
    QString text =
        QStringLiteral("%1  %2 s (%3 %)")
            .arg(limitLabel(share.name), timeNumber(share.seconds),
                 QString::number(100.0 * share.seconds / total, 'f', share.seconds > 0.1 * total ? 0 : 1));
    if (share.priced && share.saved > 5e-4) text += tr("   +10 % saves %1 s").arg(timeNumber(share.saved));
    painter.drawText(QRect(left + 24, top, columnWidth - 28, line), Qt::AlignLeft | Qt::AlignVCenter,
                     fontMetrics().elidedText(text, Qt::ElideRight, columnWidth - 28));
    if (++column == columns) {
      column = 0;
      ++row;
    }
  }
}

}  // namespace kf::ui
