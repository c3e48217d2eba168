// Tables: the contours of the drawing, the tight spots of the chosen one, and its joints.
// Units in the headings.
#pragma once

#include <QTableView>

#include "ui/models/table_models.h"

class QLabel;

namespace kf::ui {

// Choosing a row chooses the contour.
class ContourTable : public QTableView {
  Q_OBJECT

 public:
  explicit ContourTable(Document& document, QWidget* parent = nullptr);
  QSize sizeHint() const override { return {420, 110}; }

 private:
  void follow();
  Document& document_;
  ContourModel model_;
  bool following_ = false;
};

// Choosing a row shows the place in canvas and plot; the row of the place under the cursor is marked.
class SpotTable : public QTableView {
  Q_OBJECT

 public:
  explicit SpotTable(Document& document, QWidget* parent = nullptr);
  const SpotModel& spots() const { return model_; }

 private:
  void follow();
  void show(int row);
  Document& document_;
  SpotModel model_;
  bool following_ = false;
};

// Corners and curvature steps: what the driven path makes of each. Choosing a row shows the place.
class JointPanel : public QWidget {
  Q_OBJECT

 public:
  explicit JointPanel(Document& document, QWidget* parent = nullptr);

 private:
  void refresh();
  Document& document_;
  JointModel model_;
  QTableView* table_ = nullptr;
  QLabel* summary_ = nullptr;
};

}  // namespace kf::ui
