// Questions to the user: units, entities that can't be used, cautions, and the export of points.
// Units as shown.
#pragma once

#include <QDialog>
#include <optional>

#include "ui/models/document.h"
#include "ui/settings/settings.h"

class QCheckBox;
class QComboBox;
class QDoubleSpinBox;
class QLabel;
class QLineEdit;

namespace kf::ui {

// mm a drawing unit; empty when the user gave up.
std::optional<double> askUnits(QWidget* parent, const QString& file);

// True when the user goes on without the entities that the message names.
bool askGoOnWithout(QWidget* parent, const QString& message);

// The cautions, once for each set of limits; for example limits also that they were checked against the
// machine. True when the user accepts; remembered then.
bool acceptCautions(QWidget* parent, const limits::Limits& limits, Settings& settings);
QString cautionText();

// Which contours, how sampled, and where to.
class PointsDialog : public QDialog {
  Q_OBJECT

 public:
  PointsDialog(const Document& document, Settings& settings, QWidget* parent = nullptr);
  pipeline::PointListRequest request() const;
  bool onlyChosen() const;
  void setPath(const QString& path);

 private:
  void refreshStep();
  void browse();
  Settings& settings_;
  QComboBox *contours_, *sampling_;
  QDoubleSpinBox* step_;
  QLabel *unit_, *count_;
  QLineEdit* path_;
  const Document& document_;
};

}  // namespace kf::ui
