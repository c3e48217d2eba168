// Curvature, and allowed and planned speed, along the chosen contour.
// Length in mm or in, or time in s, across; 1/mm or 1/in, and mm/min or in/min, up.
#pragma once

#include <QWidget>
#include <memory>

#include "ui/models/document.h"

namespace kf::ui {

// Moving the mouse moves the cursor; wheel zooms along the path, drag pans, double click shows the whole
// path. With the keyboard: arrows step, + and - zoom, Home shows the whole path.
class PlotPane : public QWidget {
  Q_OBJECT

 public:
  explicit PlotPane(Document& document, QWidget* parent = nullptr);
  ~PlotPane() override;

  bool againstTime() const;
  void setAgainstTime(bool time);
  void showWhole();
  // What is on the horizontal axis, in its own unit: for tests.
  double rangeLow() const;
  double rangeHigh() const;
  bool savePicture(const QString& path) const;  // PNG, by the ending

 signals:
  void axisChanged(bool time);

 protected:
  void keyPressEvent(QKeyEvent* event) override;

 private:
  struct Parts;
  void makeRects();
  void makeGraphs();
  void makeItems();
  void linkAxes();
  void connectDocument();
  double lengthAt(double shown) const;  // arc length, mm
  void tellStretch();
  void placeSpots();
  void rebuild();
  void decimate();
  void placeCursor();
  void showPlace(double s, double halfWidth);
  void labelAxes();
  void fitBendAxis();

  Document& document_;
  std::unique_ptr<Parts> parts_;
};

}  // namespace kf::ui
