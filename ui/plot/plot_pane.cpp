// Curvature, and allowed and planned speed, along the chosen contour.
// Length in mm or in, or time in s, across.
#include "ui/plot/plot_pane.h"

#include <qcustomplot.h>

#include <QKeyEvent>
#include <QLabel>
#include <QStackedLayout>
#include <algorithm>
#include <cmath>

#include "ui/plot/decimate.h"

namespace kf::ui {
namespace {

const QColor kCurvature(0xB0, 0x50, 0x88), kAllowed(0xE6, 0x9F, 0x00), kPlanned(0x00, 0x72, 0xB2),
    kReference(0x33, 0x38, 0x40), kCursor(0xD5, 0x5E, 0x00), kWords(0x2f, 0x36, 0x40),
    kFrame(0x8a, 0x92, 0x9d);
constexpr std::size_t kSpotsShown = 12;

// Time at each node of the path; both sides of a break share it.
std::vector<double> timesAtNodes(const path::Path& path, const schedule::Schedule& schedule) {
  std::vector<double> t(path.size());
  std::size_t j = 0;
  for (std::size_t i = 0; i < path.size(); ++i) {
    while (j + 1 < schedule.size() && schedule.s()[j] < path.s[i]) ++j;
    t[i] = schedule.t()[j];
  }
  return t;
}

}  // namespace

struct PlotPane::Parts {
  QCustomPlot* plot = nullptr;
  QCPAxisRect *bendRect = nullptr, *speedRect = nullptr;
  QCPGraph *bend = nullptr, *allowed = nullptr, *planned = nullptr, *reference = nullptr;
  QCPLegend* speedLegend = nullptr;
  QCPItemStraightLine *bendLine = nullptr, *speedLine = nullptr;
  QCPItemTracer *bendDot = nullptr, *speedDot = nullptr;
  std::vector<QCPItemText*> spots;  // numbers of the worst tight spots, above the speed
  QStackedLayout* pages = nullptr;
  bool time = false, busy = false;
  bool whole = true;  // the view follows the whole path until the user zooms or pans
  // The full data, in shown units.
  std::vector<double> x, k, cap, v, referenceX, referenceV;
};

PlotPane::PlotPane(Document& document, QWidget* parent)
    : QWidget(parent), document_(document), parts_(std::make_unique<Parts>()) {
  setMinimumHeight(150);
  setFocusPolicy(Qt::StrongFocus);
  setAccessibleName(tr("Curvature and speed along the path"));
  parts_->pages = new QStackedLayout(this);
  parts_->plot = new QCustomPlot(this);
  auto* empty = new QLabel(tr("Curvature, and allowed and planned speed, show here"), this);
  empty->setAlignment(Qt::AlignCenter);
  empty->setStyleSheet(QStringLiteral("background:white; color:#5c6470;"));
  parts_->pages->addWidget(empty);
  parts_->pages->addWidget(parts_->plot);
  makeRects();
  makeGraphs();
  makeItems();
  linkAxes();
  connectDocument();
  labelAxes();
}

void PlotPane::makeRects() {
  QCustomPlot* plot = parts_->plot;
  plot->setPlottingHint(QCP::phFastPolylines, true);
  plot->setNoAntialiasingOnDrag(true);
  plot->plotLayout()->clear();
  parts_->bendRect = new QCPAxisRect(plot);
  parts_->speedRect = new QCPAxisRect(plot);
  plot->plotLayout()->addElement(0, 0, parts_->bendRect);
  plot->plotLayout()->addElement(1, 0, parts_->speedRect);
  plot->plotLayout()->setRowStretchFactors({0.75, 1.0});
  plot->plotLayout()->setRowSpacing(0);
  auto* margins = new QCPMarginGroup(plot);
  for (QCPAxisRect* rect : {parts_->bendRect, parts_->speedRect}) {
    rect->setMarginGroup(QCP::msLeft | QCP::msRight, margins);
    rect->setRangeDrag(Qt::Horizontal);
    rect->setRangeZoom(Qt::Horizontal);
    rect->setMinimumMargins(QMargins(8, 4, 12, 4));
    for (QCPAxis* axis : rect->axes()) {
      axis->setLayer(QStringLiteral("axes"));
      axis->setSubTicks(false);
      axis->setBasePen(QPen(kFrame));
      axis->setTickPen(QPen(kFrame));
      axis->setLabelColor(kWords);
      axis->setTickLabelColor(kWords);
      axis->setNumberFormat(QStringLiteral("g"));
    }
    for (QCPGrid* grid : {rect->axis(QCPAxis::atBottom)->grid(), rect->axis(QCPAxis::atLeft)->grid()}) {
      grid->setLayer(QStringLiteral("grid"));
      grid->setPen(QPen(QColor(0xe3, 0xe6, 0xea), 1));
      grid->setZeroLinePen(QPen(QColor(0xb9, 0xbf, 0xc8), 1));
    }
    rect->axis(QCPAxis::atLeft)->ticker()->setTickCount(4);
  }
  parts_->bendRect->axis(QCPAxis::atBottom)->setTickLabels(false);
}

void PlotPane::makeGraphs() {
  QCustomPlot* plot = parts_->plot;
  const auto graph = [plot](QCPAxisRect* rect, const QString& name, const QPen& pen) {
    auto* g = plot->addGraph(rect->axis(QCPAxis::atBottom), rect->axis(QCPAxis::atLeft));
    g->setName(name);
    g->setPen(pen);
    g->setAdaptiveSampling(false);  // the data are thinned here, in order
    return g;
  };
  parts_->bend = graph(parts_->bendRect, tr("curvature, left turn up"), QPen(kCurvature, 1.6));
  parts_->allowed = graph(parts_->speedRect, tr("allowed speed"), QPen(kAllowed, 1.2));
  parts_->reference = graph(parts_->speedRect, tr("pinned plan"), QPen(kReference, 1.6, Qt::DashLine));
  parts_->planned = graph(parts_->speedRect, tr("planned speed"), QPen(kPlanned, 2));
  parts_->planned->setBrush(QColor(0x00, 0x72, 0xB2, 28));
  for (QCPAxisRect* rect : {parts_->bendRect, parts_->speedRect}) {
    auto* legend = new QCPLegend;
    rect->insetLayout()->addElement(legend, Qt::AlignTop | Qt::AlignRight);
    legend->setLayer(QStringLiteral("legend"));
    legend->setFillOrder(QCPLegend::foColumnsFirst);
    legend->setBorderPen(Qt::NoPen);
    legend->setBrush(QColor(255, 255, 255, 215));
    legend->setMargins({6, 2, 6, 2});
    legend->setTextColor(kWords);
    for (QCPGraph* g : rect->graphs()) g->addToLegend(legend);
    if (rect == parts_->speedRect) parts_->speedLegend = legend;
  }
}

// The cursor's line and dots, and the numbers of the tight spots.
void PlotPane::makeItems() {
  QCustomPlot* plot = parts_->plot;
  for (QCPAxisRect* rect : {parts_->bendRect, parts_->speedRect}) {
    QCPAxis *across = rect->axis(QCPAxis::atBottom), *up = rect->axis(QCPAxis::atLeft);
    auto* line = new QCPItemStraightLine(plot);
    line->setClipAxisRect(rect);
    line->setPen(QPen(kCursor, 1.2));
    auto* dot = new QCPItemTracer(plot);
    dot->setClipAxisRect(rect);
    dot->setStyle(QCPItemTracer::tsCircle);
    dot->setSize(9);
    dot->setPen(QPen(kCursor, 2));
    dot->setBrush(Qt::white);
    for (QCPAbstractItem* item : {static_cast<QCPAbstractItem*>(line), static_cast<QCPAbstractItem*>(dot)}) {
      item->setVisible(false);
      item->setSelectable(false);
      for (QCPItemPosition* p : item->positions()) p->setAxes(across, up);
    }
    (rect == parts_->bendRect ? parts_->bendLine : parts_->speedLine) = line;
    (rect == parts_->bendRect ? parts_->bendDot : parts_->speedDot) = dot;
  }
  for (std::size_t i = 0; i < kSpotsShown; ++i) {
    auto* text = new QCPItemText(plot);
    text->setClipAxisRect(parts_->speedRect);
    text->position->setAxes(parts_->speedRect->axis(QCPAxis::atBottom),
                            parts_->speedRect->axis(QCPAxis::atLeft));
    text->position->setTypeY(QCPItemPosition::ptAxisRectRatio);
    text->position->setAxisRect(parts_->speedRect);
    text->setPositionAlignment(Qt::AlignHCenter | Qt::AlignBottom);
    text->setText(QString::number(i + 1));
    text->setColor(kWords);
    text->setPadding(QMargins(3, 0, 3, 0));
    text->setBrush(QColor(255, 255, 255, 200));
    text->setPen(QPen(kFrame, 1));
    text->setVisible(false);
    text->setSelectable(false);
    parts_->spots.push_back(text);
  }
}

// Both parts show the same stretch; a user's zoom or pan is told to the document.
void PlotPane::linkAxes() {
  QCustomPlot* plot = parts_->plot;
  plot->setInteractions(QCP::iRangeDrag | QCP::iRangeZoom);
  QCPAxis *bendX = parts_->bendRect->axis(QCPAxis::atBottom),
          *speedX = parts_->speedRect->axis(QCPAxis::atBottom);
  const auto follow = [this](QCPAxis* other) {
    return [this, other](const QCPRange& range) {
      if (parts_->busy) return;
      parts_->whole = false;
      parts_->busy = true;
      other->setRange(range);
      parts_->busy = false;
      decimate();
      tellStretch();
      parts_->plot->replot(QCustomPlot::rpQueuedReplot);
    };
  };
  connect(bendX, qOverload<const QCPRange&>(&QCPAxis::rangeChanged), this, follow(speedX));
  connect(speedX, qOverload<const QCPRange&>(&QCPAxis::rangeChanged), this, follow(bendX));
  connect(plot, &QCustomPlot::mousePress, this, [this] { setFocus(Qt::MouseFocusReason); });
  connect(plot, &QCustomPlot::mouseMove, this, [this, speedX](QMouseEvent* event) {
    if (document_.plan() != nullptr && event->buttons() == Qt::NoButton)
      document_.setCursor(lengthAt(speedX->pixelToCoord(event->position().x())));
  });
  connect(plot, &QCustomPlot::mouseDoubleClick, this, &PlotPane::showWhole);
}

void PlotPane::connectDocument() {
  const auto wholeAgain = [this] {
    parts_->whole = true;
    rebuild();
  };
  connect(&document_, &Document::opened, this, wholeAgain);
  connect(&document_, &Document::chosenChanged, this, wholeAgain);
  connect(&document_, &Document::unitsChanged, this, wholeAgain);
  connect(&document_, &Document::plansChanged, this, &PlotPane::rebuild);
  connect(&document_, &Document::referenceChanged, this, &PlotPane::rebuild);
  connect(&document_, &Document::cursorChanged, this, &PlotPane::placeCursor);
  connect(&document_, &Document::placeShown, this, &PlotPane::showPlace);
}

double PlotPane::lengthAt(double shown) const {
  const auto* planned = document_.plan();
  if (planned == nullptr) return 0.0;
  const double s = parts_->time ? planned->plan.schedule.atTime(shown).s : toMm(shown, document_.units());
  return std::clamp(s, 0.0, planned->facts.length);
}

void PlotPane::tellStretch() {
  if (parts_->whole || document_.plan() == nullptr) {
    document_.setStretch(std::nullopt);
  } else {
    document_.setStretch(std::pair(lengthAt(rangeLow()), lengthAt(rangeHigh())));
  }
}

void PlotPane::keyPressEvent(QKeyEvent* event) {
  const auto* planned = document_.plan();
  QCPAxis* axis = parts_->speedRect->axis(QCPAxis::atBottom);
  const double step =
      planned == nullptr ? 0.0 : planned->facts.length / (event->modifiers() & Qt::ShiftModifier ? 50 : 500);
  switch (event->key()) {
    case Qt::Key_Right:
      document_.setCursor(document_.cursor().value_or(0.0) + step);
      break;
    case Qt::Key_Left:
      document_.setCursor(document_.cursor().value_or(0.0) - step);
      break;
    case Qt::Key_Plus:
    case Qt::Key_Equal:
      axis->scaleRange(
          0.8, parts_->speedLine->visible() ? parts_->speedLine->point1->key() : axis->range().center());
      break;
    case Qt::Key_Minus:
      axis->scaleRange(1.25, axis->range().center());
      break;
    case Qt::Key_Home:
      showWhole();
      break;
    default:
      QWidget::keyPressEvent(event);
  }
}

PlotPane::~PlotPane() = default;

bool PlotPane::againstTime() const {
  return parts_->time;
}

void PlotPane::setAgainstTime(bool time) {
  if (time == parts_->time) return;
  parts_->time = time;
  labelAxes();
  rebuild();
  showWhole();
  emit axisChanged(time);
}

double PlotPane::rangeLow() const {
  return parts_->speedRect->axis(QCPAxis::atBottom)->range().lower;
}
double PlotPane::rangeHigh() const {
  return parts_->speedRect->axis(QCPAxis::atBottom)->range().upper;
}
bool PlotPane::savePicture(const QString& path) const {
  return parts_->plot->savePng(path, 0, 0, 2.0);
}

void PlotPane::labelAxes() {
  const Units units = document_.units();
  parts_->speedRect->axis(QCPAxis::atBottom)
      ->setLabel(parts_->time ? tr("time, s") : tr("path length, %1").arg(lengthUnit(units)));
  parts_->speedRect->axis(QCPAxis::atLeft)->setLabel(feedUnit(units));
  parts_->bendRect->axis(QCPAxis::atLeft)->setLabel(QStringLiteral("1/%1").arg(lengthUnit(units)));
}

void PlotPane::rebuild() {
  Parts& p = *parts_;
  labelAxes();
  for (auto* list : {&p.x, &p.k, &p.cap, &p.v, &p.referenceX, &p.referenceV}) list->clear();
  const auto* planned = document_.plan();
  p.pages->setCurrentIndex(planned == nullptr ? 0 : 1);
  const Units units = document_.units();
  if (planned != nullptr) {
    const path::Path& path = *planned->path;
    const double feed = document_.limits().feed.value_or(1.0);
    std::vector<double> t;
    if (p.time) t = timesAtNodes(path, planned->plan.schedule);
    for (std::size_t i = 0; i < path.size(); ++i) {
      p.x.push_back(p.time ? t[i] : fromMm(path.s[i], units));
      p.k.push_back(units == Units::inch ? path.k[i] * 25.4 : path.k[i]);
      p.cap.push_back(fromMm(60.0 * std::min(std::sqrt(planned->plan.caps.q[i]), feed), units));
      p.v.push_back(fromMm(60.0 * std::sqrt(planned->plan.q[i]), units));
    }
    const auto index = static_cast<std::size_t>(document_.chosen());
    if (index < document_.reference().size() && document_.reference()[index]) {
      const schedule::Schedule& old = document_.reference()[index]->plan.schedule;
      for (std::size_t i = 0; i < old.size(); ++i) {
        p.referenceX.push_back(p.time ? old.t()[i] : fromMm(old.s()[i], units));
        p.referenceV.push_back(fromMm(60.0 * std::sqrt(old.q()[i]), units));
      }
    }
    fitBendAxis();
    double top = fromMm(60.0 * feed, units);
    if (!p.referenceV.empty())
      top = std::max(top, *std::max_element(p.referenceV.begin(), p.referenceV.end()));
    p.speedRect->axis(QCPAxis::atLeft)->setRange(0.0, 1.28 * top);
  }
  p.reference->setVisible(!p.referenceX.empty());
  if (p.reference->visible()) {
    p.reference->addToLegend(p.speedLegend);
  } else {
    p.reference->removeFromLegend(p.speedLegend);
  }
  // A change of limits keeps the view that the user chose.
  if (p.whole || p.x.empty()) {
    showWhole();
  } else {
    decimate();
    placeCursor();
  }
}

// Small blends bend a thousand times more than the drawing does. The axis shows what nearly all of the length
// needs; peaks that would flatten all else are cut, and the key says so.
void PlotPane::fitBendAxis() {
  Parts& p = *parts_;
  const path::Path& path = *document_.plan()->path;
  std::vector<std::pair<double, double>> weights;  // |k|, length
  for (std::size_t i = 0; i + 1 < path.size(); ++i) {
    weights.emplace_back(std::max(std::abs(p.k[i]), std::abs(p.k[i + 1])), path.s[i + 1] - path.s[i]);
  }
  std::sort(weights.begin(), weights.end());
  double length = 0.0;
  auto usual = weights.begin();
  while (usual + 1 != weights.end() && (length += usual->second) < 0.99 * path.length) ++usual;
  const double largest = weights.back().first;
  const bool cut = largest > 8.0 * usual->first && usual->first > 0.0;
  const double reach = cut ? 2.0 * usual->first : largest;
  const auto [low, high] = std::minmax_element(p.k.begin(), p.k.end());
  const double from = std::max(std::min(*low, 0.0), -reach), to = std::min(std::max(*high, 0.0), reach);
  const double room = to > from ? 0.12 * (to - from) : 1.0;
  p.bendRect->axis(QCPAxis::atLeft)->setRange(from - room, to + 2.5 * room);
  p.bend->setName(cut ? tr("curvature, left turn up; peaks cut") : tr("curvature, left turn up"));
}

// Numbers stand at the foot of the speed plot; of those that would cover one another the worst stays.
void PlotPane::placeSpots() {
  const auto* planned = document_.plan();
  const QCPAxis* across = parts_->speedRect->axis(QCPAxis::atBottom);
  std::vector<double> taken;
  for (std::size_t i = 0; i < parts_->spots.size(); ++i) {
    QCPItemText* text = parts_->spots[i];
    text->setVisible(false);
    if (planned == nullptr || i >= planned->tightSpots.size()) continue;
    const double s = planned->tightSpots[i].s;
    const double at = parts_->time ? planned->plan.schedule.atLength(s).t : fromMm(s, document_.units());
    const double pixel = across->coordToPixel(at);
    if (std::any_of(taken.begin(), taken.end(), [&](double other) { return std::abs(other - pixel) < 18.0; }))
      continue;
    taken.push_back(pixel);
    text->setVisible(true);
    const double left = parts_->speedRect->left() + 9.0, right = parts_->speedRect->right() - 9.0;
    const bool inside = pixel >= left - 9.0 && pixel <= right + 9.0;
    text->position->setCoords(
        inside && right > left ? across->pixelToCoord(std::clamp(pixel, left, right)) : at, 0.98);
  }
}

void PlotPane::showWhole() {
  const double end = parts_->x.empty() ? 1.0 : parts_->x.back();
  parts_->whole = true;
  parts_->busy = true;
  for (QCPAxisRect* rect : {parts_->bendRect, parts_->speedRect})
    rect->axis(QCPAxis::atBottom)->setRange(0.0, end > 0.0 ? end : 1.0);
  parts_->busy = false;
  tellStretch();
  decimate();
  placeCursor();
}

void PlotPane::showPlace(double s, double halfWidth) {
  const auto* planned = document_.plan();
  if (planned == nullptr) return;
  const auto at = [&](double place) {
    const double clamped = std::clamp(place, 0.0, planned->facts.length);
    return parts_->time ? planned->plan.schedule.atLength(clamped).t : fromMm(clamped, document_.units());
  };
  const double half = std::max(4.0 * halfWidth, 0.02 * planned->facts.length);
  parts_->speedRect->axis(QCPAxis::atBottom)->setRange(at(s - half), at(s + half));
  parts_->plot->replot(QCustomPlot::rpQueuedReplot);
}

void PlotPane::decimate() {
  Parts& p = *parts_;
  const QCPRange range = p.speedRect->axis(QCPAxis::atBottom)->range();
  const int columns = std::max(100, p.plot->width());
  const auto give = [&](QCPGraph* graph, const std::vector<double>& x, const std::vector<double>& y) {
    const Thinned thin = thinned(x, y, range.lower, range.upper, columns);
    graph->setData(QVector<double>(thin.x.begin(), thin.x.end()),
                   QVector<double>(thin.y.begin(), thin.y.end()), true);
  };
  give(p.bend, p.x, p.k);
  give(p.allowed, p.x, p.cap);
  give(p.planned, p.x, p.v);
  give(p.reference, p.referenceX, p.referenceV);
  placeSpots();
}

void PlotPane::placeCursor() {
  Parts& p = *parts_;
  const auto* planned = document_.plan();
  const bool shown = planned != nullptr && document_.cursor();
  const double at = !shown   ? 0.0
                    : p.time ? planned->plan.schedule.atLength(*document_.cursor()).t
                             : fromMm(*document_.cursor(), document_.units());
  for (QCPItemStraightLine* line : {p.bendLine, p.speedLine}) {
    line->setVisible(shown);
    line->point1->setCoords(at, 0.0);
    line->point2->setCoords(at, 1.0);
  }
  p.bendDot->setVisible(shown);
  p.speedDot->setVisible(shown);
  if (shown) {
    const double k = planned->path->sample(*document_.cursor()).k;
    const double v = planned->plan.schedule.atLength(*document_.cursor()).v;
    p.bendDot->position->setCoords(at, document_.units() == Units::inch ? 25.4 * k : k);
    p.speedDot->position->setCoords(at, fromMm(60.0 * v, document_.units()));
  }
  p.plot->replot(QCustomPlot::rpQueuedReplot);
}

}  // namespace kf::ui
