// How the canvas is painted: grid, contours in colour, legend, marks.
// mm in the drawing, pixels on screen.
#include <QPainter>
#include <QPainterPath>
#include <algorithm>
#include <array>
#include <cmath>
#include <map>

#include "ui/canvas/canvas.h"
#include "ui/format/colours.h"

namespace kf::ui {
namespace {

const QColor kGround(0x20, 0x24, 0x2b), kGridLine(0x2c, 0x31, 0x3a), kInk(0xd8, 0xdc, 0xe2),
    kFaint(0x6e, 0x76, 0x82), kMark(0xff, 0xff, 0xff);
constexpr int kShades = 64;

// 1, 2 or 5 times a power of ten, at least `least`.
double roundStep(double least) {
  const double power = std::pow(10.0, std::floor(std::log10(least)));
  for (double m : {1.0, 2.0, 5.0}) {
    if (m * power >= least) return m * power;
  }
  return 10.0 * power;
}

struct ScaleRange {
  double low = 0.0, high = 1.0;
};

// What a contour is coloured by, at node i, as a part of the scale.
double partOf(const Document& document, const pipeline::PlannedContour& planned, std::size_t i,
              const ScaleRange& range) {
  const double value =
      document.colouring() == Colouring::speed ? std::sqrt(planned.plan.q[i]) : std::abs(planned.path->k[i]);
  return range.high > range.low ? (value - range.low) / (range.high - range.low) : 1.0;
}

// Speed from 0 to the feed; curvature from 0 to what all but the tightest hundredth of the path stays below.
ScaleRange rangeOf(const Document& document) {
  if (document.colouring() == Colouring::speed)
    return {0.0, std::max(1e-9, document.limits().feed.value_or(1.0))};
  std::vector<double> all;
  for (int i = 0; i < document.contourCount(); ++i) {
    if (const auto* planned = document.planAt(i)) {
      for (double k : planned->path->k) all.push_back(std::abs(k));
    }
  }
  if (all.empty()) return {};
  const auto at = all.begin() + static_cast<std::ptrdiff_t>(0.99 * static_cast<double>(all.size() - 1));
  std::nth_element(all.begin(), at, all.end());
  return {0.0, std::max(*at, 1e-9)};
}

}  // namespace

void Canvas::paintEvent(QPaintEvent* /*event*/) {
  const QSize pixels = size() * devicePixelRatioF();
  if (stale_ || image_.size() != pixels) render();
  QPainter painter(this);
  painter.drawPixmap(0, 0, image_);
  if (!document_.isEmpty()) drawCursor(painter);
}

void Canvas::render() {
  image_ = QPixmap(size() * devicePixelRatioF());
  image_.setDevicePixelRatio(devicePixelRatioF());
  image_.fill(kGround);
  stale_ = false;
  QPainter painter(&image_);
  if (document_.isEmpty()) {
    drawEmpty(painter);
    return;
  }
  drawGrid(painter);
  painter.setRenderHint(QPainter::Antialiasing);
  for (int i = 0; i < document_.contourCount(); ++i) {
    if (i != document_.chosen()) drawContour(painter, i);
  }
  drawContour(painter, document_.chosen());
  drawMarks(painter);
  drawScaleBar(painter);
  drawLegend(painter);
}

void Canvas::drawEmpty(QPainter& painter) const {
  painter.setPen(kInk);
  QFont font = painter.font();
  font.setPointSizeF(font.pointSizeF() * 1.5);
  painter.setFont(font);
  painter.drawText(rect().adjusted(0, -24, 0, -24), Qt::AlignCenter,
                   document_.isOpening() ? tr("Opening\u2026") : tr("Drop a drawing here"));
  font.setPointSizeF(font.pointSizeF() / 1.5);
  painter.setFont(font);
  painter.setPen(kFaint.lighter(130));
  painter.drawText(rect().adjusted(0, 28, 0, 28), Qt::AlignCenter,
                   tr("or open one with Ctrl+O: DXF, or a CSV list of x,y points"));
}

void Canvas::drawGrid(QPainter& painter) const {
  const double factor = document_.units() == Units::inch ? 25.4 : 1.0;
  const double step = roundStep(60.0 / scale_ / factor) * factor;
  painter.setPen(QPen(kGridLine, 1));
  const double left = centre_.x() - 0.5 * width() / scale_, right = centre_.x() + 0.5 * width() / scale_;
  const double low = centre_.y() - 0.5 * height() / scale_, high = centre_.y() + 0.5 * height() / scale_;
  for (double x = std::ceil(left / step) * step; x <= right; x += step) {
    const double at = std::round(toScreen(x, 0).x()) + 0.5;
    painter.drawLine(QPointF(at, 0), QPointF(at, height()));
  }
  for (double y = std::ceil(low / step) * step; y <= high; y += step) {
    const double at = std::round(toScreen(0, y).y()) + 0.5;
    painter.drawLine(QPointF(0, at), QPointF(width(), at));
  }
}

void Canvas::drawScaleBar(QPainter& painter) const {
  const double factor = document_.units() == Units::inch ? 25.4 : 1.0;
  const double step = roundStep(60.0 / scale_ / factor);
  const double length = step * factor * scale_;
  const QPointF from(16, height() - 18);
  painter.setPen(QPen(kInk, 2));
  painter.drawLine(from, from + QPointF(length, 0));
  painter.drawLine(from + QPointF(0, -4), from + QPointF(0, 4));
  painter.drawLine(from + QPointF(length, -4), from + QPointF(length, 4));
  painter.drawText(from + QPointF(6, -8),
                   QString::number(step, 'g', 6) + u' ' + lengthUnit(document_.units()));
}

void Canvas::drawContour(QPainter& painter, int index) const {
  const auto* prepared = document_.preparedAt(index);
  if (prepared == nullptr) return;
  const path::Path& path = *prepared->path;
  const bool chosen = index == document_.chosen();
  if (document_.planAt(index) != nullptr) {
    if (chosen && document_.contourCount() > 1) {  // a halo marks the chosen one
      QPolygonF line;
      line.reserve(static_cast<int>(path.size()));
      for (std::size_t i = 0; i < path.size(); ++i) line << toScreen(path.x[i], path.y[i]);
      painter.setPen(QPen(QColor(255, 255, 255, 60), 10, Qt::SolidLine, Qt::RoundCap, Qt::RoundJoin));
      painter.drawPolyline(line);
    }
    drawColoured(painter, index);
    return;
  }
  QPolygonF line;
  for (std::size_t i = 0; i < path.size(); ++i) line << toScreen(path.x[i], path.y[i]);
  painter.setPen(QPen(chosen ? kInk : kFaint, chosen ? 2.0 : 1.2));
  painter.drawPolyline(line);
}

// Neighbouring cells of one shade make one polyline, so that thousands of nodes cost few strokes.
void Canvas::drawColoured(QPainter& painter, int index) const {
  const pipeline::PlannedContour& planned = *document_.planAt(index);
  const path::Path& path = *planned.path;
  const double width = index == document_.chosen() ? 3.4 : 2.2;
  const bool byLimit = document_.colouring() == Colouring::limit;
  const ScaleRange range = rangeOf(document_);
  const auto shadeOf = [&](std::size_t i) {
    if (byLimit) return static_cast<int>(planned.plan.limitedBy[i]);
    const double part =
        0.5 * (partOf(document_, planned, i, range) + partOf(document_, planned, i + 1, range));
    return static_cast<int>(std::clamp(part, 0.0, 1.0) * (kShades - 1) + 0.5);
  };
  QPolygonF run;
  int shade = -1;
  const auto flush = [&] {
    if (run.size() > 1) {
      const auto name = static_cast<LimitName>(std::max(shade, 0));
      QPen pen(byLimit ? limitColour(name) : scaleColour(static_cast<double>(shade) / (kShades - 1)), width,
               byLimit ? limitDash(name) : Qt::SolidLine, byLimit ? Qt::FlatCap : Qt::RoundCap,
               Qt::RoundJoin);
      painter.setPen(pen);
      painter.drawPolyline(run);
    }
  };
  for (std::size_t i = 0; i + 1 < path.size(); ++i) {
    if (path.breakAfter[i] != path::BreakKind::none) continue;
    const int now = shadeOf(i);
    if (now != shade) {
      flush();
      run.clear();
      shade = now;
      run << toScreen(path.x[i], path.y[i]);
    }
    run << toScreen(path.x[i + 1], path.y[i + 1]);
  }
  flush();
}

void Canvas::drawMarks(QPainter& painter) const {
  const auto* prepared = document_.preparedAt(document_.chosen());
  if (prepared == nullptr) return;
  const path::Path& path = *prepared->path;
  // Start: a ring with an arrow in the direction of travel.
  const QPointF start = toScreen(path.x[0], path.y[0]);
  const QPointF along(path.tx[0], -path.ty[0]), across(-along.y(), along.x());
  painter.setPen(QPen(kMark, 1.6));
  painter.setBrush(kGround);
  painter.drawEllipse(start, 5, 5);
  const QPointF tip = start + along * 24;
  painter.drawLine(start + along * 6, tip);
  painter.setBrush(kMark);
  painter.drawPolygon(QPolygonF({tip, tip - along * 8 + across * 4, tip - along * 8 - across * 4}));
  // The worst tight spots, numbered as in their table.
  const auto* planned = document_.plan();
  if (planned == nullptr) return;
  QFont font = painter.font();
  font.setPointSizeF(font.pointSizeF() * 0.85);
  painter.setFont(font);
  const std::size_t shown = std::min<std::size_t>(planned->tightSpots.size(), 9);
  for (std::size_t i = shown; i-- > 0;) {
    const pipeline::TightSpot& spot = planned->tightSpots[i];
    const QPointF at = toScreen(spot.x, spot.y);
    const path::Sample p = path.sample(spot.s);
    const double side = p.k > 0.0 ? 1.0 : -1.0;  // on the outside of the bend
    const QPointF label = at + QPointF(p.ty, p.tx) * (14.0 * side);
    painter.setPen(QPen(kMark, 1));
    painter.setBrush(QColor(0x20, 0x24, 0x2b, 200));
    painter.drawEllipse(label, 8, 8);
    painter.drawText(QRectF(label - QPointF(8, 8), QSizeF(16, 16)), Qt::AlignCenter, QString::number(i + 1));
  }
}

void Canvas::drawLegend(QPainter& painter) const {
  const QFontMetricsF metrics(painter.font());
  painter.setPen(kInk);
  if (document_.colouring() != Colouring::limit) {
    const bool speed = document_.colouring() == Colouring::speed;
    const ScaleRange range = rangeOf(document_);
    const QRectF bar(width() - 216.0, 30, 200, 10);
    for (int i = 0; i < 200; ++i)
      painter.fillRect(QRectF(bar.left() + i, bar.top(), 1.5, bar.height()), scaleColour(i / 199.0));
    const QString title = speed ? tr("planned speed, %1").arg(feedUnit(document_.units()))
                                : tr("curvature, 1/%1").arg(lengthUnit(document_.units()));
    painter.drawText(QPointF(bar.left(), bar.top() - 8), title);
    const double factor = document_.units() == Units::inch ? 25.4 : 1.0;
    const QString high = speed ? feedNumber(range.high, document_.units())
                               : u'\u2265' + QString::number(range.high * factor, 'g', 3);
    painter.drawText(QPointF(bar.left(), bar.bottom() + 15), QStringLiteral("0"));
    painter.drawText(QPointF(bar.right() - metrics.horizontalAdvance(high), bar.bottom() + 15), high);
    return;
  }
  std::array<bool, kLimitNameCount> used{};
  for (int i = 0; i < document_.contourCount(); ++i) {
    if (const auto* planned = document_.planAt(i)) {
      for (LimitName name : planned->plan.limitedBy) used[static_cast<std::size_t>(name)] = true;
    }
  }
  double y = 22;
  painter.drawText(QPointF(width() - 216.0, y), tr("what limits the speed"));
  for (LimitName name : allLimitNames()) {
    if (!used[static_cast<std::size_t>(name)]) continue;
    y += 18;
    painter.setPen(QPen(limitColour(name), 3, limitDash(name), Qt::FlatCap));
    painter.drawLine(QPointF(width() - 216.0, y - 4), QPointF(width() - 180.0, y - 4));
    painter.setPen(kInk);
    painter.drawText(QPointF(width() - 172.0, y), limitLabel(name));
  }
}

void Canvas::drawCursor(QPainter& painter) const {
  const auto* prepared = document_.preparedAt(document_.chosen());
  if (prepared == nullptr || !document_.cursor()) return;
  const path::Sample p = prepared->path->sample(*document_.cursor());
  const QPointF at = toScreen(p.x, p.y);
  painter.setRenderHint(QPainter::Antialiasing);
  // The circle that fits the bend here, where it is worth seeing.
  const double radius = p.k != 0.0 ? scale_ / std::abs(p.k) : 1e9;
  if (radius < 3.0 * std::max(width(), height())) {
    const QPointF centre = at + QPointF(-p.ty, -p.tx) * (scale_ / p.k);
    painter.setPen(QPen(QColor(255, 255, 255, 110), 1, Qt::DashLine));
    painter.setBrush(Qt::NoBrush);
    painter.drawEllipse(centre, radius, radius);
  }
  painter.setPen(QPen(Qt::black, 4));
  painter.drawEllipse(at, 7, 7);
  painter.setPen(QPen(kMark, 2));
  painter.drawEllipse(at, 7, 7);
}

}  // namespace kf::ui
