// Tables: the contours of the drawing, and the tight spots of the chosen one.
// Units in the headings.
#include "ui/panels/tables.h"

#include <QHeaderView>
#include <algorithm>

#include "ui/format/colours.h"

namespace kf::ui {
namespace {

void setUp(QTableWidget& table) {
  table.setEditTriggers(QAbstractItemView::NoEditTriggers);
  table.setSelectionBehavior(QAbstractItemView::SelectRows);
  table.setSelectionMode(QAbstractItemView::SingleSelection);
  table.setAlternatingRowColors(true);
  table.setTabKeyNavigation(false);
  table.setWordWrap(false);
  table.verticalHeader()->hide();
  table.verticalHeader()->setDefaultSectionSize(table.fontMetrics().height() + 6);
  table.horizontalHeader()->setHighlightSections(false);
  table.horizontalHeader()->setSectionResizeMode(QHeaderView::ResizeToContents);
  table.horizontalHeader()->setMinimumSectionSize(28);
  table.setVerticalScrollMode(QAbstractItemView::ScrollPerPixel);
}

QTableWidgetItem* cell(const QString& text, bool number) {
  auto* item = new QTableWidgetItem(text);
  item->setTextAlignment((number ? Qt::AlignRight : Qt::AlignLeft) | Qt::AlignVCenter);
  return item;
}

}  // namespace

ContourTable::ContourTable(Document& document, QWidget* parent) : QTableWidget(parent), document_(document) {
  setUp(*this);
  setAccessibleName(tr("Contours"));
  setColumnCount(5);
  horizontalHeader()->setSectionResizeMode(1, QHeaderView::Stretch);
  for (auto signal : {&Document::opened, &Document::plansChanged, &Document::unitsChanged})
    connect(&document_, signal, this, &ContourTable::refresh);
  connect(&document_, &Document::chosenChanged, this, &ContourTable::follow);
  connect(this, &QTableWidget::currentCellChanged, this, [this](int row) {
    if (!refreshing_ && row >= 0) document_.choose(row);
  });
  refresh();
}

void ContourTable::refresh() {
  refreshing_ = true;
  setHorizontalHeaderLabels({QStringLiteral("#"), tr("contour"), tr("kind"),
                             tr("length, %1").arg(lengthUnit(document_.units())), tr("time, s")});
  setRowCount(document_.contourCount());
  for (int i = 0; i < document_.contourCount(); ++i) {
    const auto* prepared = document_.preparedAt(i);
    const auto* planned = document_.planAt(i);
    setItem(i, 0, cell(QString::number(prepared->facts.number), true));
    setItem(i, 1, cell(QString::fromStdString(prepared->facts.name), false));
    setItem(i, 2, cell(prepared->facts.closed ? tr("closed") : tr("open"), false));
    setItem(i, 3, cell(lengthNumber(prepared->facts.length, document_.units()), true));
    setItem(i, 4, cell(planned == nullptr ? QStringLiteral("-") : timeNumber(planned->plan.time), true));
  }
  refreshing_ = false;
  follow();
}

void ContourTable::follow() {
  refreshing_ = true;
  if (document_.chosen() < rowCount()) setCurrentCell(document_.chosen(), 0);
  refreshing_ = false;
}

SpotTable::SpotTable(Document& document, QWidget* parent) : QTableWidget(parent), document_(document) {
  setUp(*this);
  setAccessibleName(tr("Tight spots"));
  setColumnCount(8);
  for (auto signal :
       {&Document::opened, &Document::plansChanged, &Document::chosenChanged, &Document::unitsChanged}) {
    connect(&document_, signal, this, &SpotTable::refresh);
  }
  connect(this, &QTableWidget::cellClicked, this, [this](int row) { show(row); });
  connect(this, &QTableWidget::currentCellChanged, this, [this](int row, int, int before) {
    if (!refreshing_ && row >= 0 && row != before && hasFocus()) show(row);
  });
  refresh();
}

void SpotTable::refresh() {
  refreshing_ = true;
  const Units units = document_.units();
  const QString length = lengthUnit(units);
  setHorizontalHeaderLabels({QStringLiteral("#"), tr("lost, s"), tr("limited by"),
                             tr("radius, %1").arg(length), tr("speed, %1").arg(feedUnit(units)),
                             tr("at, %1").arg(length), tr("x, %1").arg(length), tr("y, %1").arg(length)});
  const auto* planned = document_.plan();
  setRowCount(planned == nullptr ? 0 : static_cast<int>(planned->tightSpots.size()));
  for (int i = 0; i < rowCount(); ++i) {
    const pipeline::TightSpot& spot = planned->tightSpots[static_cast<std::size_t>(i)];
    setItem(i, 0, cell(QString::number(i + 1), true));
    setItem(i, 1, cell(timeNumber(spot.timeLost), true));
    setItem(i, 2, cell(limitLabel(spot.limitedBy), false));
    setItem(i, 3, cell(radiusNumber(spot.radius, units), true));
    setItem(i, 4, cell(feedNumber(spot.speed, units), true));
    setItem(i, 5, cell(lengthNumber(spot.s, units), true));
    setItem(i, 6, cell(lengthNumber(spot.x, units), true));
    setItem(i, 7, cell(lengthNumber(spot.y, units), true));
  }
  clearSelection();
  setCurrentCell(-1, -1);
  refreshing_ = false;
}

void SpotTable::show(int row) {
  const auto* planned = document_.plan();
  if (planned == nullptr || row < 0 || row >= static_cast<int>(planned->tightSpots.size())) return;
  const pipeline::TightSpot& spot = planned->tightSpots[static_cast<std::size_t>(row)];
  document_.showPlace(spot.s, std::max({spot.s - spot.from, spot.to - spot.s, 0.5}));
}

QString SpotTable::asText() const {
  QString text;
  for (int row = -1; row < rowCount(); ++row) {
    for (int column = 0; column < columnCount(); ++column) {
      const QTableWidgetItem* item = row < 0 ? horizontalHeaderItem(column) : this->item(row, column);
      text += (item == nullptr ? QString() : item->text()) + (column + 1 == columnCount() ? u'\n' : u'\t');
    }
  }
  return text;
}

}  // namespace kf::ui
