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
    kFaint(0x6e, 0x76, 0x82), kMark(0xff, 0xff, 0xff), kHalo(0x4a, 0x52, 0x5e), kPanel(0x2a, 0x2f, 0x38, 225),
    kUncut(0xff, 0x8a, 0x5c);
constexpr std::size_t kSpotsShown = 12;
constexpr int kShades = 64;

// 1, 2 or 5 times a power of ten, at least `least`.
double roundStep(double least) {
  const double power = std::pow(10.0, std::floor(std::log10(least)));
  for (double m : {1.0, 2.0, 5.0}) {
    if (m * power >= least) return m * power;
  }
  return 10.0 * power;
}

// What a contour is coloured by, at node i, as a part of the scale.
double partOf(const Document& document, const pipeline::PlannedContour& planned, std::size_t i,
              const Canvas::ScaleRange& range) {
  const double value =
      document.colouring() == Colouring::speed ? std::sqrt(planned.plan.q[i]) : std::abs(planned.path->k[i]);
  return range.high > range.low ? (value - range.low) / (range.high - range.low) : 1.0;
}

// Speed from 0 to the feed; curvature from 0 to what all but the tightest hundredth of the path stays below.
Canvas::ScaleRange rangeOf(const Document& document) {
  if (document.colouring() == Colouring::speed)
    return {0.0, std::max(1e-9, document.limits().feed.value_or(1.0)), false};
  std::vector<double> all;
  for (int i = 0; i < document.contourCount(); ++i) {
    if (const auto* planned = document.planAt(i)) {
      for (double k : planned->path->k) all.push_back(std::abs(k));
    }
  }
  if (all.empty()) return {};
  const auto at = all.begin() + static_cast<std::ptrdiff_t>(0.99 * static_cast<double>(all.size() - 1));
  std::nth_element(all.begin(), at, all.end());
  const double high = std::max(*at, 1e-9);
  return {0.0, high, *std::max_element(at, all.end()) > 1.0001 * high};
}

constexpr double kLeastStep = 0.7;  // px; nodes nearer than this are not drawn one by one

bool isFar(const QPointF& a, const QPointF& b) {
  return std::abs(a.x() - b.x()) + std::abs(a.y() - b.y()) >= kLeastStep;
}

}  // namespace

void Canvas::paintEvent(QPaintEvent* /*event*/) {
  const QSize pixels = size() * devicePixelRatioF();
  if (stale_ || image_.size() != pixels) render();
  QPainter painter(this);
  painter.drawPixmap(0, 0, image_);
  if (document_.isEmpty()) return;
  drawCursor(painter);
  if (pointer_) {
    const QPointF at = toDrawing(*pointer_);
    painter.setPen(kInk);
    painter.drawText(rect().adjusted(0, 0, -12, -10), Qt::AlignRight | Qt::AlignBottom,
                     QStringLiteral("x %1  y %2 %3")
                         .arg(lengthNumber(at.x(), document_.units()),
                              lengthNumber(at.y(), document_.units()), lengthUnit(document_.units())));
  }
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
  range_ = rangeOf(document_);
  drawGrid(painter);
  painter.setRenderHint(QPainter::Antialiasing);
  if (document_.limits().side != limits::Side::on) drawWanted(painter);
  drawHalo(painter);
  for (int i = 0; i < document_.contourCount(); ++i) {
    if (i != document_.chosen()) drawContour(painter, i);
  }
  drawContour(painter, document_.chosen());
  drawMarks(painter);
  drawScaleBar(painter);
  drawLegend(painter);
}

void Canvas::drawEmpty(QPainter& painter) const {
  painter.setRenderHint(QPainter::Antialiasing);
  const QRectF frame = QRectF(rect()).adjusted(24, 24, -24, -24);
  painter.setPen(QPen(kFaint, 2, Qt::DashLine));
  painter.setBrush(Qt::NoBrush);
  painter.drawRoundedRect(frame, 12, 12);
  painter.setPen(kInk);
  const QFont usual = painter.font();
  QFont large = usual;
  large.setPointSizeF(usual.pointSizeF() * 1.7);
  painter.setFont(large);
  const bool opening = document_.isOpening();
  painter.drawText(frame.adjusted(0, -64, 0, -64), Qt::AlignCenter,
                   opening ? tr("Opening\u2026") : tr("Drop a drawing here"));
  painter.setFont(usual);
  painter.setPen(kInk.darker(125));
  painter.drawText(frame.adjusted(12, 36, -12, 36), Qt::AlignCenter | Qt::TextWordWrap,
                   opening ? tr("Esc stops it")
                           : tr("or press Ctrl+O to open one.\n\n"
                                "Then set the limits of your machine on the right, or drop a limits file.\n"
                                "Speed, time and tight spots follow at once; Ctrl+E writes the point list."));
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

// The drawing itself, where the tool runs beside it.
void Canvas::drawWanted(QPainter& painter) const {
  painter.setPen(QPen(kFaint, 1.2, Qt::DotLine));
  for (const QPolygonF& line : wanted_) {
    QPolygonF shown;
    shown.reserve(line.size());
    for (const QPointF& p : line) shown << toScreen(p.x(), p.y());
    painter.drawPolyline(shown);
  }
}

// A light band marks the chosen contour among several, and the stretch that the plot shows.
void Canvas::drawHalo(QPainter& painter) const {
  const auto* prepared = document_.preparedAt(document_.chosen());
  if (prepared == nullptr || (document_.contourCount() == 1 && !document_.stretch())) return;
  const path::Path& path = *prepared->path;
  const auto [from, to] = document_.stretch().value_or(std::pair(0.0, path.length));
  const path::Sample first = path.sample(from), last = path.sample(to);
  QPolygonF line;
  line << toScreen(first.x, first.y);
  for (std::size_t i = 0; i < path.size(); ++i) {
    if (path.s[i] <= from || path.s[i] >= to) continue;
    const QPointF at = toScreen(path.x[i], path.y[i]);
    if (isFar(at, line.back())) line << at;
  }
  line << toScreen(last.x, last.y);
  painter.setPen(QPen(kHalo, 12, Qt::SolidLine, Qt::RoundCap, Qt::RoundJoin));
  painter.setBrush(Qt::NoBrush);
  painter.drawPolyline(line);
}

void Canvas::drawContour(QPainter& painter, int index) const {
  const auto* prepared = document_.preparedAt(index);
  if (prepared == nullptr) return;
  if (document_.planAt(index) != nullptr) {
    drawColoured(painter, index);
    return;
  }
  const path::Path& path = *prepared->path;
  const bool chosen = index == document_.chosen();
  QPolygonF line;
  line.reserve(static_cast<qsizetype>(path.size()));
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
  const ScaleRange& range = range_;
  const auto shadeOf = [&](std::size_t i) {
    if (byLimit) return static_cast<int>(planned.plan.limitedBy[i]);
    const double part =
        0.5 * (partOf(document_, planned, i, range) + partOf(document_, planned, i + 1, range));
    return static_cast<int>(std::clamp(part, 0.0, 1.0) * (kShades - 1) + 0.5);
  };
  QPolygonF run;
  int shade = -1;
  const auto flush = [&] {
    if (run.size() < 2) return;
    const auto name = static_cast<LimitName>(std::max(shade, 0));
    painter.setPen(QPen(byLimit ? limitColour(name) : scaleColour(static_cast<double>(shade) / (kShades - 1)),
                        width, byLimit ? limitDash(name) : Qt::SolidLine,
                        byLimit ? Qt::FlatCap : Qt::RoundCap, Qt::RoundJoin));
    painter.drawPolyline(run);
  };
  // Cells smaller than a pixel are drawn together, in the shade of the slowest or most bent of them.
  int pending = -1;
  const bool lowest = document_.colouring() == Colouring::speed;
  for (std::size_t i = 0; i + 1 < path.size(); ++i) {
    if (path.breakAfter[i] != path::BreakKind::none) continue;
    const int here = shadeOf(i);
    pending = pending < 0 || byLimit ? here : lowest ? std::min(pending, here) : std::max(pending, here);
    if (run.isEmpty()) run << toScreen(path.x[i], path.y[i]);
    const QPointF at = toScreen(path.x[i + 1], path.y[i + 1]);
    if (!isFar(at, run.back()) && i + 2 < path.size()) continue;
    if (pending != shade) {
      const QPointF from = run.back();
      flush();
      run.clear();
      run << from;
      shade = pending;
    }
    run << at;
    pending = -1;
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
  drawUncut(painter);
  drawSpots(painter, path);
}

// Crosses where the tool does not reach the drawing.
void Canvas::drawUncut(QPainter& painter) const {
  painter.setPen(QPen(kUncut, 2.4));
  for (int i = 0; i < document_.contourCount(); ++i) {
    const auto* prepared = document_.preparedAt(i);
    if (prepared == nullptr || !prepared->drive) continue;
    for (const construct::UncutPlace& place : prepared->drive->uncut) {
      const QPointF at = toScreen(place.point.x, place.point.y);
      painter.drawLine(at + QPointF(-5, -5), at + QPointF(5, 5));
      painter.drawLine(at + QPointF(-5, 5), at + QPointF(5, -5));
    }
  }
}

// The worst tight spots, numbered as in their table, on the outside of the bend; labels that would cover one
// another step outwards.
void Canvas::drawSpots(QPainter& painter, const path::Path& path) const {
  const auto* planned = document_.plan();
  if (planned == nullptr) return;
  painter.save();
  QFont font = painter.font();
  font.setPointSizeF(font.pointSizeF() * 0.85);
  painter.setFont(font);
  std::vector<QPointF> placed;
  const std::size_t shown = std::min<std::size_t>(planned->tightSpots.size(), kSpotsShown);
  for (std::size_t i = 0; i < shown; ++i) {
    const pipeline::TightSpot& spot = planned->tightSpots[i];
    const path::Sample p = path.sample(spot.s);
    const double side = p.k > 0.0 ? 1.0 : -1.0;
    const QPointF at = toScreen(spot.x, spot.y), out = QPointF(p.ty, p.tx) * side;
    QPointF label = at + out * 16.0;
    const auto covered = [&] {
      return std::any_of(placed.begin(), placed.end(), [&](const QPointF& other) {
        return std::hypot(other.x() - label.x(), other.y() - label.y()) < 18.0;
      });
    };
    for (int step = 1; covered() && step < 4; ++step) label = at + out * (16.0 + 18.0 * step);
    if (covered()) continue;
    placed.push_back(label);
    painter.setPen(QPen(kMark, 1));
    painter.drawLine(at, label - out * 8.0);
    painter.setBrush(kGround);
    painter.drawEllipse(label, 8, 8);
    painter.drawText(QRectF(label - QPointF(8, 8), QSizeF(16, 16)), Qt::AlignCenter, QString::number(i + 1));
  }
  painter.restore();
}

std::vector<LimitName> Canvas::limitsInUse() const {
  std::array<bool, kLimitNameCount> used{};
  for (int i = 0; i < document_.contourCount(); ++i) {
    if (const auto* planned = document_.planAt(i)) {
      for (LimitName name : planned->plan.limitedBy) used[static_cast<std::size_t>(name)] = true;
    }
  }
  std::vector<LimitName> list;
  for (LimitName name : allLimitNames()) {
    if (used[static_cast<std::size_t>(name)]) list.push_back(name);
  }
  return list;
}

double Canvas::legendHeight() const {
  if (document_.colouring() != Colouring::limit) return 52.0;
  return 28.0 + 17.0 * static_cast<double>((limitsInUse().size() + 1) / 2);
}

void Canvas::drawLegend(QPainter& painter) const {
  if (document_.colouring() == Colouring::limit) {
    drawLimitLegend(painter);
    return;
  }
  const QRectF box(width() - 236.0, 8, 228, legendHeight()), bar(box.left() + 12, box.top() + 22, 204, 9);
  painter.setPen(Qt::NoPen);
  painter.setBrush(kPanel);
  painter.drawRoundedRect(box, 5, 5);
  for (int i = 0; i < static_cast<int>(bar.width()); ++i)
    painter.fillRect(QRectF(bar.left() + i, bar.top(), 1.5, bar.height()), scaleColour(i / bar.width()));
  const bool speed = document_.colouring() == Colouring::speed;
  const QString title = speed ? tr("Planned speed, %1").arg(feedUnit(document_.units()))
                              : tr("Curvature, 1/%1").arg(lengthUnit(document_.units()));
  painter.setPen(kInk);
  painter.drawText(QPointF(bar.left(), bar.top() - 7), title);
  const double factor = document_.units() == Units::inch ? 25.4 : 1.0;
  const auto number = [&](double value) {
    return speed ? feedNumber(value, document_.units()) : QString::number(value * factor, 'g', 3);
  };
  const QRectF under(bar.left(), bar.bottom() + 2, bar.width(), 16);
  painter.drawText(under, Qt::AlignLeft, QStringLiteral("0"));
  painter.drawText(under, Qt::AlignHCenter, number(0.5 * range_.high));
  painter.drawText(under, Qt::AlignRight,
                   range_.cut ? tr("%1 and more").arg(number(range_.high)) : number(range_.high));
}

// In two columns, so that it stays low.
void Canvas::drawLimitLegend(QPainter& painter) const {
  constexpr double kColumn = 204.0;
  const std::vector<LimitName> list = limitsInUse();
  const QRectF box(width() - 2 * kColumn - 16.0, 8, 2 * kColumn + 8, legendHeight());
  painter.setPen(Qt::NoPen);
  painter.setBrush(kPanel);
  painter.drawRoundedRect(box, 5, 5);
  painter.setPen(kInk);
  painter.drawText(QPointF(box.left() + 12, box.top() + 17), tr("What limits the speed"));
  for (std::size_t i = 0; i < list.size(); ++i) {
    const QPointF at(box.left() + 12 + kColumn * static_cast<double>(i % 2),
                     box.top() + 35 + 17.0 * static_cast<double>(i / 2));
    painter.setPen(QPen(limitColour(list[i]), 3.4, limitDash(list[i]), Qt::FlatCap));
    painter.drawLine(at + QPointF(0, -4), at + QPointF(30, -4));
    painter.setPen(kInk);
    painter.drawText(at + QPointF(38, 0), limitLabel(list[i]));
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
  if (radius < 0.6 * std::max(width(), height())) {
    const QPointF centre = at + QPointF(-p.ty, -p.tx) * (scale_ / p.k);
    painter.setPen(QPen(QColor(255, 255, 255, 110), 1, Qt::DashLine));
    painter.setBrush(Qt::NoBrush);
    painter.drawEllipse(centre, radius, radius);
  }
  // The tool, where it is large enough to see.
  const double tool = 0.5 * scale_ * document_.limits().toolDiameter.value_or(0.0);
  if (tool > 9.0) {
    painter.setPen(QPen(QColor(255, 255, 255, 140), 1));
    painter.setBrush(QColor(255, 255, 255, 36));
    painter.drawEllipse(at, tool, tool);
    painter.setBrush(Qt::NoBrush);
  }
  painter.setPen(QPen(Qt::black, 4));
  painter.drawEllipse(at, 7, 7);
  painter.setPen(QPen(kMark, 2));
  painter.drawEllipse(at, 7, 7);
}

}  // namespace kf::ui
