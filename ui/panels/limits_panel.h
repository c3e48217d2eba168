// The limits, each with a number, a slider and a way to switch it off.
// Units as shown beside each number.
#pragma once

#include <QWidget>
#include <vector>

#include "ui/models/document.h"

class QCheckBox;
class QComboBox;
class QDoubleSpinBox;
class QGridLayout;
class QLabel;
class QLineEdit;
class QSlider;

namespace kf::ui {

// Every change goes to the document at once, so that plan, plot and time follow the slider.
class LimitsPanel : public QWidget {
  Q_OBJECT

 public:
  explicit LimitsPanel(Document& document, QWidget* parent = nullptr);

 private:
  struct Row {
    const limits::Field* field = nullptr;
    QCheckBox* on = nullptr;  // null: a plan needs this limit
    QLabel* label = nullptr;
    QDoubleSpinBox* number = nullptr;
    QSlider* slider = nullptr;
    QLabel* unit = nullptr;
    double remembered = 0.0;  // the file's unit; what switching on again brings back
    double pivot = 0.0;       // the slider's middle, file's unit
  };

  void makeHead();
  void addChoices(QGridLayout& grid, int& line);
  void addSide(QGridLayout& grid, int line);
  void addRow(QGridLayout& grid, int line, const limits::Field& field);
  void connectRow(std::size_t index);
  void refreshRow(Row& row);
  void refresh();
  void change(std::size_t index, double fileValue);

  Document& document_;
  std::vector<Row> rows_;
  QLineEdit* name_ = nullptr;
  QWidget* example_ = nullptr;
  QComboBox *law_ = nullptr, *joints_ = nullptr, *side_ = nullptr;
  bool refreshing_ = false;
};

}  // namespace kf::ui
