// The joints of the chosen contour as a table.
// mm or in in the cells, degrees for turns.
#include <algorithm>
#include <cmath>
#include <numbers>

#include "ui/models/table_models.h"

namespace kf::ui {

JointModel::JointModel(Document& document, QObject* parent)
    : QAbstractTableModel(parent), document_(document) {
  for (auto signal :
       {&Document::opened, &Document::plansChanged, &Document::chosenChanged, &Document::unitsChanged})
    connect(&document_, signal, this, &JointModel::refresh);
  refresh();
}

void JointModel::refresh() {
  beginResetModel();
  drive_.reset();
  rows_.clear();
  exact_.clear();
  if (const auto* prepared = document_.preparedAt(document_.chosen())) {
    number_ = prepared->facts.number;
    drive_ = prepared->drive;
    if (drive_) {
      for (std::size_t i = 0; i < drive_->joints.size(); ++i) {
        if (drive_->joints[i].treatment != construct::Treatment::smooth) rows_.push_back(i);
      }
    } else {
      exact_ = prepared->facts.joints;
    }
  }
  endResetModel();
}

int JointModel::rowCount(const QModelIndex& parent) const {
  return parent.isValid() ? 0 : static_cast<int>(drive_ ? rows_.size() : exact_.size());
}
int JointModel::columnCount(const QModelIndex& parent) const {
  return parent.isValid() ? 0 : 6;
}

QVariant JointModel::data(const QModelIndex& index, int role) const {
  if (index.row() >= rowCount()) return {};
  if (role == Qt::TextAlignmentRole)
    return static_cast<int>((index.column() == 1 || index.column() == 4 ? Qt::AlignLeft : Qt::AlignRight) |
                            Qt::AlignVCenter);
  const auto row = static_cast<std::size_t>(index.row());
  const construct::JointReport* report = drive_ ? &drive_->joints[rows_[row]] : nullptr;
  const contour::Joint& joint = report != nullptr ? report->joint : exact_[row];
  const bool blended = report != nullptr && report->treatment == construct::Treatment::blended;
  if (role == Qt::CheckStateRole && index.column() == 4 && report != nullptr)
    return static_cast<int>(blended ? Qt::Checked : Qt::Unchecked);
  if (role == Qt::ToolTipRole && index.column() == 4)
    return report == nullptr ? tr("Corners are kept exactly")
                             : tr("Tick to blend, untick to keep it exactly");
  if (role != Qt::DisplayRole) return {};
  switch (index.column()) {
    case 0:
      return lengthNumber(joint.s, document_.units());
    case 1:
      return joint.kind == contour::JointKind::tangentBreak ? tr("corner") : tr("curvature step");
    case 2:
      return QString::number(joint.turn * 180.0 / std::numbers::pi, 'f', 1) + u'\u00B0';
    case 3:
      if (std::abs(joint.curvatureChange) < 1e-9) return QStringLiteral("\u2013");
      return QString::number(
          document_.units() == Units::inch ? 25.4 * joint.curvatureChange : joint.curvatureChange, 'g', 3);
    case 4:
      if (blended) return report->crowded ? tr("blended, short neighbour") : tr("blended");
      return joint.kind == contour::JointKind::tangentBreak ? tr("kept: stops") : tr("kept");
    default:
      return blended ? lengthNumber(report->deviation, document_.units()) : QStringLiteral("0");
  }
}

bool JointModel::setData(const QModelIndex& index, const QVariant& value, int role) {
  if (role != Qt::CheckStateRole || !drive_ || index.row() >= rowCount()) return false;
  const auto& report = drive_->joints[rows_[static_cast<std::size_t>(index.row())]];
  document_.setJointBlended(number_, report.joint.before, value.toInt() == Qt::Checked);
  return true;
}

Qt::ItemFlags JointModel::flags(const QModelIndex& index) const {
  const Qt::ItemFlags usual = QAbstractTableModel::flags(index);
  // Choices go by the drawing's contour; further parts of an offset contour have none of their own.
  const bool own = drive_ && number_ <= static_cast<int>(document_.drawing()->contours.size());
  return index.column() == 4 && own ? usual | Qt::ItemIsUserCheckable : usual;
}

QVariant JointModel::headerData(int section, Qt::Orientation orientation, int role) const {
  if (orientation != Qt::Horizontal || role != Qt::DisplayRole) return {};
  const QString length = lengthUnit(document_.units());
  const QString heads[] = {tr("At, %1").arg(length),     tr("Kind"),   tr("Turn"),
                           tr("Step, 1/%1").arg(length), tr("Driven"), tr("Off by, %1").arg(length)};
  return heads[section];
}

std::optional<double> JointModel::placeOf(int row) const {
  const auto* prepared = document_.preparedAt(document_.chosen());
  if (row < 0 || row >= rowCount() || prepared == nullptr) return std::nullopt;
  const contour::Joint& joint = drive_ ? drive_->joints[rows_[static_cast<std::size_t>(row)]].joint
                                       : exact_[static_cast<std::size_t>(row)];
  if (!drive_) return joint.s;
  // The driven path is a little shorter than the wanted one: the nearest node is the place.
  const path::Path& path = *prepared->path;
  std::size_t best = 0;
  double least = HUGE_VAL;
  for (std::size_t i = 0; i < path.size(); ++i) {
    const double away = std::hypot(path.x[i] - joint.point.x, path.y[i] - joint.point.y);
    // A path may cross itself: of places equally near, the one with the nearest path length.
    const double score = away + 1e-3 * std::abs(path.s[i] - joint.s);
    if (score < least) {
      least = score;
      best = i;
    }
  }
  return path.s[best];
}

QString JointModel::summary() const {
  if (!drive_) {
    if (rowCount() == 0) return tr("No corner and no step of the curvature on this contour.");
    return tr("%1 joints, all kept exactly: the motion stops at corners.").arg(rowCount());
  }
  if (rows_.empty()) return tr("No corner and no step of the curvature on this contour.");
  QString text = tr("%1 of %2 joints blended, at most %3 off the drawing.")
                     .arg(drive_->blended)
                     .arg(rows_.size())
                     .arg(lengthText(drive_->largestDeviation, document_.units()));
  if (drive_->stopped > 0) text += tr(" %1 kept exactly.").arg(drive_->stopped);
  if (drive_->crowded > 0) text += tr(" %1 made smaller by a short neighbour.").arg(drive_->crowded);
  return text;
}

}  // namespace kf::ui
