// The drawing, coloured by what is planned along it.
// mm in the drawing, pixels on screen; y points up.
#pragma once

#include <QPixmap>
#include <QPointF>
#include <QPolygonF>
#include <QWidget>
#include <optional>
#include <vector>

#include "ui/models/document.h"

namespace kf::ui {

// Wheel: zoom at the pointer. Drag: pan. Double click or Home: fit. Moving over the chosen contour moves the
// cursor; a click on another contour chooses it. Arrow keys step along the path.
class Canvas : public QWidget {
  Q_OBJECT

 public:
  explicit Canvas(Document& document, QWidget* parent = nullptr);

  void fit();
  void zoomBy(double factor, QPointF at);
  // Brings the stretch of the chosen contour around s into view.
  void showPlace(double s, double halfWidth);
  QPointF toScreen(double x, double y) const;
  QPointF toDrawing(QPointF screen) const;

  // What the ends of the colour scale stand for; `cut`: larger values take its end's colour.
  struct ScaleRange {
    double low = 0.0, high = 1.0;
    bool cut = false;
  };

  QSize sizeHint() const override { return {700, 420}; }

 protected:
  void paintEvent(QPaintEvent* event) override;
  void resizeEvent(QResizeEvent* event) override;
  void wheelEvent(QWheelEvent* event) override;
  void mousePressEvent(QMouseEvent* event) override;
  void mouseMoveEvent(QMouseEvent* event) override;
  void mouseReleaseEvent(QMouseEvent* event) override;
  void mouseDoubleClickEvent(QMouseEvent* event) override;
  void leaveEvent(QEvent* event) override;
  void keyPressEvent(QKeyEvent* event) override;

 private:
  struct Near {
    int contour = -1;
    double s = 0.0;
    double pixels = 1e300;
  };

  void refresh();
  void refreshFitted();
  void render();
  void traceWanted();
  void drawWanted(QPainter& painter) const;
  void drawHalo(QPainter& painter) const;
  void drawContour(QPainter& painter, int index) const;
  void drawColoured(QPainter& painter, int index) const;
  void drawGrid(QPainter& painter) const;
  void drawScaleBar(QPainter& painter) const;
  std::vector<LimitName> limitsInUse() const;
  double legendHeight() const;
  void drawLegend(QPainter& painter) const;
  void drawLimitLegend(QPainter& painter) const;
  void drawMarks(QPainter& painter) const;
  void drawUncut(QPainter& painter) const;
  void drawSpots(QPainter& painter, const path::Path& path) const;
  void drawCursor(QPainter& painter) const;
  void drawEmpty(QPainter& painter) const;
  // The place of a contour nearest to a screen point.
  Near nearestOn(int index, QPointF at) const;

  Document& document_;
  QPixmap image_;
  bool stale_ = true, fitted_ = true, dragging_ = false, moved_ = false;
  double scale_ = 1.0;    // pixels a mm
  QPointF centre_{0, 0};  // mm, in the middle of the widget
  QPointF lastMouse_;
  std::optional<QPointF> pointer_;
  ScaleRange range_;
  std::vector<QPolygonF> wanted_;  // the drawing's contours, mm
};

}  // namespace kf::ui
