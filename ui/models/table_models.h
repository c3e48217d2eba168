// Tables without widgets: the contours, the tight spots of the chosen one, and its joints.
// Units in the headings.
#pragma once

#include <QAbstractTableModel>

#include "ui/models/document.h"

namespace kf::ui {

// Number, name, open or closed, length, time.
class ContourModel : public QAbstractTableModel {
  Q_OBJECT

 public:
  explicit ContourModel(Document& document, QObject* parent = nullptr);
  int rowCount(const QModelIndex& parent = {}) const override;
  int columnCount(const QModelIndex& parent = {}) const override;
  QVariant data(const QModelIndex& index, int role) const override;
  QVariant headerData(int section, Qt::Orientation orientation, int role) const override;

 private:
  void refresh();
  Document& document_;
  int rows_ = 0;
};

// Worst first, by time lost.
class SpotModel : public QAbstractTableModel {
  Q_OBJECT

 public:
  explicit SpotModel(Document& document, QObject* parent = nullptr);
  int rowCount(const QModelIndex& parent = {}) const override;
  int columnCount(const QModelIndex& parent = {}) const override;
  QVariant data(const QModelIndex& index, int role) const override;
  QVariant headerData(int section, Qt::Orientation orientation, int role) const override;

  const pipeline::TightSpot* spot(int row) const;
  // The row whose stretch holds the place, the tightest stretch first; -1 when none does.
  int rowAt(double s) const;
  // All rows as text, columns parted by tabs.
  QString asText() const;

 private:
  void refresh();
  Document& document_;
  std::shared_ptr<const pipeline::PlannedContour> plan_;
};

// Tangent breaks and curvature steps of the drawing, and what the driven path makes of them. The tick box
// keeps a joint exact.
class JointModel : public QAbstractTableModel {
  Q_OBJECT

 public:
  explicit JointModel(Document& document, QObject* parent = nullptr);
  int rowCount(const QModelIndex& parent = {}) const override;
  int columnCount(const QModelIndex& parent = {}) const override;
  QVariant data(const QModelIndex& index, int role) const override;
  bool setData(const QModelIndex& index, const QVariant& value, int role) override;
  Qt::ItemFlags flags(const QModelIndex& index) const override;
  QVariant headerData(int section, Qt::Orientation orientation, int role) const override;

  // Where the joint lies on the driven path.
  std::optional<double> placeOf(int row) const;
  // "12 of 14 joints blended, at most 0.0199 mm off the drawing; 2 kept: the motion stops or slows there"
  QString summary() const;

 private:
  void refresh();
  Document& document_;
  std::shared_ptr<const pipeline::DriveReport> drive_;
  std::vector<contour::Joint> exact_;  // without a report: the joints of the path itself
  std::vector<std::size_t> rows_;      // into drive_->joints
  int number_ = 0;
};

}  // namespace kf::ui
