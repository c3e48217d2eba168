// The answer at the top: total time, the bound that no plan beats, and the place under the cursor.
// Units in the text.
#pragma once

#include <QWidget>

#include "ui/models/document.h"

class QLabel;

namespace kf::ui {

class SummaryPanel : public QWidget {
  Q_OBJECT

 public:
  explicit SummaryPanel(Document& document, QWidget* parent = nullptr);

 private:
  void refresh();
  Document& document_;
  QLabel *time_, *bound_, *compare_, *problem_;
};

// One line: s, x, y, radius, speed, what limits, time. Empty without a cursor.
class CursorReadout : public QWidget {
  Q_OBJECT

 public:
  explicit CursorReadout(Document& document, QWidget* parent = nullptr);
  QString text() const;

 private:
  void refresh();
  Document& document_;
  QLabel* label_;
};

}  // namespace kf::ui
