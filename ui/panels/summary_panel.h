// The answer at the top: total time, the bound that no plan beats, and the place under the cursor.
// Units in the text.
#pragma once

#include <QWidget>
#include <array>

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
  void refreshComparison(bool planned);
  void refreshProblem();
  QLabel *time_, *working_, *bound_, *scope_, *compare_, *problem_;
};

// One line: s, x, y, radius, speed, time, what limits; dashes without a cursor.
class CursorReadout : public QWidget {
  Q_OBJECT

 public:
  explicit CursorReadout(Document& document, QWidget* parent = nullptr);
  QString text() const;
  QSize minimumSizeHint() const override { return {200, QWidget::minimumSizeHint().height()}; }

 protected:
  void resizeEvent(QResizeEvent* event) override;

 private:
  void refresh();
  void refit();
  Document& document_;
  std::array<QLabel*, 7> heads_{}, values_{};
  QLabel* swatch_ = nullptr;
};

}  // namespace kf::ui
