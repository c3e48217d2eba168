// Tables: the contours of the drawing, and the tight spots of the chosen one.
// Units in the headings.
#pragma once

#include <QTableWidget>

#include "ui/models/document.h"

namespace kf::ui {

// Number, name, open or closed, length, time. Choosing a row chooses the contour.
class ContourTable : public QTableWidget {
  Q_OBJECT

 public:
  explicit ContourTable(Document& document, QWidget* parent = nullptr);

 private:
  void refresh();
  void follow();
  Document& document_;
  bool refreshing_ = false;
};

// Worst first, by time lost. Choosing a row shows the place in canvas and plot.
class SpotTable : public QTableWidget {
  Q_OBJECT

 public:
  explicit SpotTable(Document& document, QWidget* parent = nullptr);
  // All rows as text, columns parted by tabs.
  QString asText() const;

 private:
  void refresh();
  void show(int row);
  Document& document_;
  bool refreshing_ = false;
};

}  // namespace kf::ui
