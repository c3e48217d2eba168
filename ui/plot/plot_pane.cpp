// Curvature, and allowed and planned speed, along the chosen contour.
// Length in mm or in, or time in s, across.
#include "ui/plot/plot_pane.h"

#include <qcustomplot.h>

#include <QVBoxLayout>
#include <algorithm>
#include <cmath>

#include "ui/plot/decimate.h"

namespace kf::ui {
namespace {

const QColor kCurvature(0xCC, 0x79, 0xA7), kAllowed(0xE6, 0x9F, 0x00), kPlanned(0x00, 0x72, 0xB2),
    kReference(0x55, 0x55, 0x55);

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
  bool time = false, busy = false;
  bool whole = true;  // the view follows the whole path until the user zooms or pans
  // The full data, in shown units.
  std::vector<double> x, k, cap, v, referenceX, referenceV;
};

PlotPane::PlotPane(Document& document, QWidget* parent)
    : QWidget(parent), document_(document), parts_(std::make_unique<Parts>()) {
  auto* layout = new QVBoxLayout(this);
  layout->setContentsMargins(0, 0, 0, 0);
  auto* plot = parts_->plot = new QCustomPlot(this);
  layout->addWidget(plot);
  setMinimumHeight(150);
  setAccessibleName(tr("Curvature and speed along the path"));
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
    for (QCPAxis* axis : rect->axes()) axis->setLayer(QStringLiteral("axes"));
    for (QCPGrid* grid : {rect->axis(QCPAxis::atBottom)->grid(), rect->axis(QCPAxis::atLeft)->grid()})
      grid->setLayer(QStringLiteral("grid"));
  }
  parts_->bendRect->axis(QCPAxis::atBottom)->setTickLabels(false);
  const auto graph = [plot](QCPAxisRect* rect, const QString& name, const QPen& pen) {
    auto* g = plot->addGraph(rect->axis(QCPAxis::atBottom), rect->axis(QCPAxis::atLeft));
    g->setName(name);
    g->setPen(pen);
    g->setAdaptiveSampling(false);  // the data are thinned here, in order
    return g;
  };
  parts_->bend = graph(parts_->bendRect, tr("curvature, left turn up"), QPen(kCurvature, 1.6));
  parts_->allowed = graph(parts_->speedRect, tr("allowed speed"), QPen(kAllowed, 1.4, Qt::DashLine));
  parts_->reference = graph(parts_->speedRect, tr("pinned plan"), QPen(kReference, 1.4, Qt::DotLine));
  parts_->planned = graph(parts_->speedRect, tr("planned speed"), QPen(kPlanned, 2));
  parts_->planned->setBrush(QColor(0x00, 0x72, 0xB2, 28));
  for (QCPAxisRect* rect : {parts_->bendRect, parts_->speedRect}) {
    auto* line = new QCPItemStraightLine(plot);
    line->setClipAxisRect(rect);
    line->setPen(QPen(QColor(0xD5, 0x5E, 0x00), 1.2));
    line->setVisible(false);
    for (QCPItemPosition* p : line->positions())
      p->setAxes(rect->axis(QCPAxis::atBottom), rect->axis(QCPAxis::atLeft));
    (rect == parts_->bendRect ? parts_->bendLine : parts_->speedLine) = line;
    auto* legend = new QCPLegend;
    rect->insetLayout()->addElement(legend, Qt::AlignTop | Qt::AlignRight);
    legend->setLayer(QStringLiteral("legend"));
    legend->setFillOrder(QCPLegend::foColumnsFirst);
    legend->setBorderPen(Qt::NoPen);
    legend->setBrush(QColor(255, 255, 255, 200));
    legend->setMargins({6, 2, 6, 2});
    for (QCPGraph* g : rect->graphs()) g->addToLegend(legend);
    if (rect == parts_->speedRect) parts_->speedLegend = legend;
  }
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
      parts_->plot->replot(QCustomPlot::rpQueuedReplot);
    };
  };
  connect(bendX, qOverload<const QCPRange&>(&QCPAxis::rangeChanged), this, follow(speedX));
  connect(speedX, qOverload<const QCPRange&>(&QCPAxis::rangeChanged), this, follow(bendX));
  connect(plot, &QCustomPlot::mouseMove, this, [this, speedX](QMouseEvent* event) {
    const auto* planned = document_.plan();
    if (planned == nullptr || event->buttons() != Qt::NoButton) return;
    const double at = speedX->pixelToCoord(event->position().x());
    document_.setCursor(parts_->time ? planned->plan.schedule.atTime(at).s : toMm(at, document_.units()));
  });
  connect(plot, &QCustomPlot::mouseDoubleClick, this, &PlotPane::showWhole);
  connect(&document_, &Document::opened, this, [this] { rebuild(); });
  connect(&document_, &Document::plansChanged, this, [this] { rebuild(); });
  connect(&document_, &Document::referenceChanged, this, [this] { rebuild(); });
  connect(&document_, &Document::chosenChanged, this, [this] {
    rebuild();
    showWhole();
  });
  connect(&document_, &Document::unitsChanged, this, [this] {
    rebuild();
    showWhole();
  });
  connect(&document_, &Document::cursorChanged, this, &PlotPane::placeCursor);
  connect(&document_, &Document::placeShown, this, &PlotPane::showPlace);
  labelAxes();
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

void PlotPane::showWhole() {
  const double end = parts_->x.empty() ? 1.0 : parts_->x.back();
  parts_->speedRect->axis(QCPAxis::atBottom)->setRange(0.0, end > 0.0 ? end : 1.0);
  parts_->whole = true;
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
  p.plot->replot(QCustomPlot::rpQueuedReplot);
}

}  // namespace kf::ui
