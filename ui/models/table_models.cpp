// Tables without widgets: contours and tight spots.
// Units in the headings.
#include "ui/models/table_models.h"

#include "ui/format/colours.h"

namespace kf::ui {
namespace {

QVariant alignment(bool number) {
  return static_cast<int>((number ? Qt::AlignRight : Qt::AlignLeft) | Qt::AlignVCenter);
}

}  // namespace

ContourModel::ContourModel(Document& document, QObject* parent)
    : QAbstractTableModel(parent), document_(document) {
  for (auto signal : {&Document::opened, &Document::plansChanged, &Document::unitsChanged})
    connect(&document_, signal, this, &ContourModel::refresh);
  refresh();
}

// Rows that stay are only told to show anew, so that selection and scrolling survive a limit change.
void ContourModel::refresh() {
  if (rows_ != document_.contourCount()) {
    beginResetModel();
    rows_ = document_.contourCount();
    endResetModel();
  } else if (rows_ > 0) {
    emit dataChanged(index(0, 0), index(rows_ - 1, columnCount() - 1));
  }
  emit headerDataChanged(Qt::Horizontal, 0, columnCount() - 1);
}

int ContourModel::rowCount(const QModelIndex& parent) const {
  return parent.isValid() ? 0 : rows_;
}
int ContourModel::columnCount(const QModelIndex& parent) const {
  return parent.isValid() ? 0 : 5;
}

QVariant ContourModel::data(const QModelIndex& index, int role) const {
  if (role == Qt::TextAlignmentRole) return alignment(index.column() != 1 && index.column() != 2);
  const auto* prepared = document_.preparedAt(index.row());
  if (role != Qt::DisplayRole || prepared == nullptr) return {};
  const auto* planned = document_.planAt(index.row());
  switch (index.column()) {
    case 0:
      return prepared->facts.number;
    case 1:
      return QString::fromStdString(prepared->facts.name);
    case 2:
      return prepared->facts.closed ? tr("closed") : tr("open");
    case 3:
      return lengthNumber(prepared->facts.length, document_.units());
    default:
      return planned == nullptr ? QStringLiteral("\u2013") : timeNumber(planned->plan.time);
  }
}

QVariant ContourModel::headerData(int section, Qt::Orientation orientation, int role) const {
  if (orientation != Qt::Horizontal) return {};
  if (role == Qt::TextAlignmentRole) return alignment(section != 1 && section != 2);
  if (role != Qt::DisplayRole) return {};
  const QString heads[] = {QStringLiteral("#"), tr("Name"), tr("Ends"),
                           tr("Length, %1").arg(lengthUnit(document_.units())), tr("Time, s")};
  return heads[section];
}

SpotModel::SpotModel(Document& document, QObject* parent) : QAbstractTableModel(parent), document_(document) {
  for (auto signal :
       {&Document::opened, &Document::plansChanged, &Document::chosenChanged, &Document::unitsChanged})
    connect(&document_, signal, this, &SpotModel::refresh);
  refresh();
}

void SpotModel::refresh() {
  beginResetModel();
  plan_ = document_.planPtr(document_.chosen());
  endResetModel();
}

int SpotModel::rowCount(const QModelIndex& parent) const {
  return parent.isValid() || !plan_ ? 0 : static_cast<int>(plan_->tightSpots.size());
}
int SpotModel::columnCount(const QModelIndex& parent) const {
  return parent.isValid() ? 0 : 8;
}

const pipeline::TightSpot* SpotModel::spot(int row) const {
  return row >= 0 && row < rowCount() ? &plan_->tightSpots[static_cast<std::size_t>(row)] : nullptr;
}

int SpotModel::rowAt(double s) const {
  int best = -1;
  double width = 0.0;
  for (int row = 0; row < rowCount(); ++row) {
    const pipeline::TightSpot& one = *spot(row);
    if (s < one.from || s > one.to || (best >= 0 && one.to - one.from >= width)) continue;
    best = row;
    width = one.to - one.from;
  }
  return best;
}

QVariant SpotModel::data(const QModelIndex& index, int role) const {
  if (role == Qt::TextAlignmentRole) return alignment(index.column() != 2);
  const pipeline::TightSpot* at = spot(index.row());
  if (at == nullptr) return {};
  if (role == Qt::DecorationRole && index.column() == 2) return limitColour(at->limitedBy);
  if (role != Qt::DisplayRole) return {};
  const Units units = document_.units();
  switch (index.column()) {
    case 0:
      return index.row() + 1;
    case 1:
      return timeNumber(at->timeLost);
    case 2:
      return limitLabel(at->limitedBy);
    case 3:
      return radiusNumber(at->radius, units);
    case 4:
      return feedNumber(at->speed, units);
    case 5:
      return lengthNumber(at->s, units);
    case 6:
      return lengthNumber(at->x, units);
    default:
      return lengthNumber(at->y, units);
  }
}

QVariant SpotModel::headerData(int section, Qt::Orientation orientation, int role) const {
  if (orientation != Qt::Horizontal) return {};
  if (role == Qt::TextAlignmentRole) return alignment(section != 2);
  const QString length = lengthUnit(document_.units());
  if (role == Qt::ToolTipRole) {
    const QString tips[] = {tr("As numbered in the drawing"),
                            tr("Seconds lost against the programmed feed on this stretch"),
                            tr("What limits the speed at its slowest place"),
                            tr("Radius of the bend, %1").arg(length),
                            tr("Slowest planned speed, %1").arg(feedUnit(document_.units())),
                            tr("Path length from the start, %1").arg(length),
                            tr("Position x, %1").arg(length),
                            tr("Position y, %1").arg(length)};
    return tips[section];
  }
  if (role != Qt::DisplayRole) return {};
  const QString heads[] = {QStringLiteral("#"), tr("Lost, s"), tr("Limited by"),    tr("Radius"),
                           tr("Speed"),         tr("At"),      QStringLiteral("x"), QStringLiteral("y")};
  return heads[section];
}

QString SpotModel::asText() const {
  const QString length = lengthUnit(document_.units()), feed = feedUnit(document_.units());
  QString out = tr("#\tlost, s\tlimited by\tradius, %1\tspeed, %2\tat, %1\tx, %1\ty, %1\n").arg(length, feed);
  for (int row = 0; row < rowCount(); ++row) {
    for (int column = 0; column < columnCount(); ++column)
      out += index(row, column).data().toString() + (column + 1 == columnCount() ? u'\n' : u'\t');
  }
  return out;
}

}  // namespace kf::ui
