// The drawing on screen: view, mouse and keyboard.
// mm in the drawing, pixels on screen; y points up.
#include "ui/canvas/canvas.h"

#include <QKeyEvent>
#include <QMouseEvent>
#include <QPainter>
#include <QWheelEvent>
#include <algorithm>
#include <cmath>

namespace kf::ui {
namespace {

constexpr double kMargin = 46.0;  // px around a fitted drawing
constexpr double kReach = 28.0;   // px within which the path is pointed at
constexpr double kLeastScale = 1e-6, kMostScale = 1e6;

}  // namespace

Canvas::Canvas(Document& document, QWidget* parent) : QWidget(parent), document_(document) {
  setMouseTracking(true);
  setFocusPolicy(Qt::StrongFocus);
  setMinimumSize(260, 180);
  setAccessibleName(tr("Drawing"));
  setToolTip({});
  connect(&document_, &Document::opened, this, [this] {
    traceWanted();
    fit();
  });
  connect(&document_, &Document::opening, this, &Canvas::refresh);
  for (auto signal : {&Document::chosenChanged, &Document::unitsChanged, &Document::stretchChanged})
    connect(&document_, signal, this, &Canvas::refresh);
  for (auto signal : {&Document::plansChanged, &Document::colouringChanged})
    connect(&document_, signal, this, &Canvas::refreshFitted);
  connect(&document_, &Document::openingEnded, this, &Canvas::refresh);
  connect(&document_, &Document::cursorChanged, this, qOverload<>(&QWidget::update));
  connect(&document_, &Document::placeShown, this, &Canvas::showPlace);
}

void Canvas::refresh() {
  stale_ = true;
  update();
}

// The legend's height may have changed, and with it the room for the drawing.
void Canvas::refreshFitted() {
  if (fitted_) {
    fit();
  } else {
    refresh();
  }
}

void Canvas::fit() {
  fitted_ = true;
  if (!document_.isEmpty()) {
    const curve::Box& box = document_.drawing()->bounds;
    const double legend = legendHeight() - 10.0;  // px more at the top
    const double w = std::max(box.width(), 1e-6), h = std::max(box.height(), 1e-6);
    scale_ = std::clamp(std::min((width() - 2 * kMargin) / w, (height() - 2 * kMargin - legend) / h),
                        kLeastScale, kMostScale);
    centre_ = QPointF(0.5 * (box.low.x + box.high.x), 0.5 * (box.low.y + box.high.y) + 0.5 * legend / scale_);
  }
  refresh();
}

QPointF Canvas::toScreen(double x, double y) const {
  return {0.5 * width() + (x - centre_.x()) * scale_, 0.5 * height() - (y - centre_.y()) * scale_};
}

QPointF Canvas::toDrawing(QPointF screen) const {
  return {centre_.x() + (screen.x() - 0.5 * width()) / scale_,
          centre_.y() - (screen.y() - 0.5 * height()) / scale_};
}

// The drawing's own contours as polylines, for the times when the tool runs beside them.
void Canvas::traceWanted() {
  wanted_.clear();
  const int points = document_.drawing()->contours.size() > 200 ? 8 : 32;
  for (const contour::Contour& contour : document_.drawing()->contours) {
    QPolygonF line;
    for (const contour::Segment& segment : contour.segments) {
      const double from = segment.curve.first(), to = segment.curve.last();
      const int steps = segment.curve.asLine() != nullptr ? 1 : points;
      for (int i = line.isEmpty() ? 0 : 1; i <= steps; ++i) {
        const curve::Vec2 p = segment.curve.point(from + (to - from) * i / steps);
        line << QPointF(p.x, p.y);
      }
    }
    wanted_.push_back(line);
  }
}

void Canvas::zoomBy(double factor, QPointF at) {
  const double next = std::clamp(scale_ * factor, kLeastScale, kMostScale);
  const QPointF offset(at.x() - 0.5 * width(), 0.5 * height() - at.y());
  centre_ += offset / scale_ - offset / next;  // the place under the pointer stays there
  scale_ = next;
  fitted_ = false;
  refresh();
}

void Canvas::showPlace(double s, double halfWidth) {
  const auto* prepared = document_.preparedAt(document_.chosen());
  if (prepared == nullptr) return;
  const path::Sample p = prepared->path->sample(s);
  centre_ = {p.x, p.y};
  const double wanted = 0.25 * std::min(width(), height()) / std::max(halfWidth, 1e-3);
  // Come closer when the stretch would be small; never jump out of a closer view.
  scale_ = std::clamp(std::max(scale_, wanted), kLeastScale, kMostScale);
  fitted_ = false;
  refresh();
}

void Canvas::resizeEvent(QResizeEvent* /*event*/) {
  if (fitted_) fit();
  refresh();
}

void Canvas::wheelEvent(QWheelEvent* event) {
  zoomBy(std::pow(1.0015, event->angleDelta().y()), event->position());
  event->accept();
}

void Canvas::mousePressEvent(QMouseEvent* event) {
  if (event->button() != Qt::LeftButton && event->button() != Qt::MiddleButton) return;
  dragging_ = true;
  moved_ = false;
  lastMouse_ = event->position();
}

void Canvas::mouseMoveEvent(QMouseEvent* event) {
  pointer_ = event->position();
  update();
  if (dragging_) {
    const QPointF by = event->position() - lastMouse_;
    if (!moved_ && by.manhattanLength() < 4) return;
    moved_ = true;
    setCursor(Qt::ClosedHandCursor);
    centre_ += QPointF(-by.x(), by.y()) / scale_;
    lastMouse_ = event->position();
    fitted_ = false;
    refresh();
    return;
  }
  const Near near = nearestOn(document_.chosen(), event->position());
  if (near.pixels <= kReach) document_.setCursor(near.s);
}

void Canvas::mouseReleaseEvent(QMouseEvent* event) {
  dragging_ = false;
  unsetCursor();
  if (moved_ || event->button() != Qt::LeftButton) return;
  Near best;
  for (int i = 0; i < document_.contourCount(); ++i) {
    const Near near = nearestOn(i, event->position());
    if (near.pixels < best.pixels) best = near;
  }
  if (best.pixels > kReach) return;
  document_.choose(best.contour);
  document_.setCursor(best.s);
}

void Canvas::mouseDoubleClickEvent(QMouseEvent* /*event*/) {
  fit();
}

void Canvas::leaveEvent(QEvent* /*event*/) {
  pointer_.reset();
  update();
}

void Canvas::keyPressEvent(QKeyEvent* event) {
  const auto* prepared = document_.preparedAt(document_.chosen());
  const double length = prepared == nullptr ? 0.0 : prepared->path->length;
  const double step = length / (event->modifiers() & Qt::ShiftModifier ? 50.0 : 500.0);
  const QPointF middle(0.5 * width(), 0.5 * height());
  switch (event->key()) {
    case Qt::Key_Home:
      fit();
      break;
    case Qt::Key_Plus:
    case Qt::Key_Equal:
      zoomBy(1.25, middle);
      break;
    case Qt::Key_Minus:
      zoomBy(0.8, middle);
      break;
    case Qt::Key_Right:
      document_.setCursor(document_.cursor().value_or(0.0) + step);
      break;
    case Qt::Key_Left:
      document_.setCursor(document_.cursor().value_or(length) - step);
      break;
    default:
      QWidget::keyPressEvent(event);
  }
}

Canvas::Near Canvas::nearestOn(int index, QPointF at) const {
  Near near;
  near.contour = index;
  const auto* prepared = document_.preparedAt(index);
  if (prepared == nullptr) return near;
  const path::Path& path = *prepared->path;
  double best = 1e300;
  const double mx = toDrawing(at).x(), my = toDrawing(at).y();
  for (std::size_t i = 0; i + 1 < path.size(); ++i) {
    const double dx = path.x[i + 1] - path.x[i], dy = path.y[i + 1] - path.y[i], n = dx * dx + dy * dy;
    const double part =
        n > 0.0 ? std::clamp(((mx - path.x[i]) * dx + (my - path.y[i]) * dy) / n, 0.0, 1.0) : 0.0;
    const double ex = path.x[i] + part * dx - mx, ey = path.y[i] + part * dy - my;
    if (ex * ex + ey * ey < best) {
      best = ex * ex + ey * ey;
      near.s = path.s[i] + part * (path.s[i + 1] - path.s[i]);
    }
  }
  near.pixels = std::sqrt(best) * scale_;
  return near;
}

}  // namespace kf::ui
