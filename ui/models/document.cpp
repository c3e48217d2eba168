// What the window shows, and who changed.
// mm, s inside; units only for display.
#include "ui/models/document.h"

#include <algorithm>
#include <map>

#include "core/write/file_writer.h"
#include "ui/edits/swap_edit.h"

namespace kf::ui {
namespace {

// Up to so many nodes a plan is made at once, within a few milliseconds; above, in the background.
constexpr std::size_t kNodesAtOnce = 40'000;

QString text(const std::string& s) {
  return QString::fromStdString(s);
}

// Modest numbers to look around with, until the user's own are opened. Invented, and marked so.
limits::Limits startingLimits() {
  limits::Limits limits;
  limits.name = "Example to start with";
  limits.example = true;
  limits.x = limits.y = {150.0, 800.0, std::nullopt};
  limits.feed = 100.0;
  limits.centripetalAcceleration = 600.0;
  limits.pathTolerance = 0.02;
  return limits;
}

Result<Document::Plans> planAll(const std::vector<pipeline::PreparedContour>& prepared,
                                const limits::Limits& limits, RunControl& control) {
  Document::Plans plans;
  for (const pipeline::PreparedContour& one : prepared) {
    auto planned = pipeline::planContour(one, limits, {}, false, control);
    if (!planned) return planned.error();
    plans.push_back(std::make_shared<const pipeline::PlannedContour>(std::move(*planned)));
  }
  return plans;
}

// Many contours share the nodes, so that a large drawing stays live.
Result<std::vector<pipeline::PreparedContour>> prepareAll(const pipeline::OpenedDrawing& drawing,
                                                          const limits::Limits& limits, RunControl& control) {
  pipeline::PlanOptions planning;
  planning.targetNodes =
      std::max<std::size_t>(100, std::min<std::size_t>(2000, kNodesAtOnce / drawing.contours.size()));
  std::vector<pipeline::PreparedContour> all;
  int number = 0;
  for (const contour::Contour& contour : drawing.contours) {
    auto driven = pipeline::prepareDriven(contour, ++number, limits, planning, control);
    if (!driven) return driven.error();
    for (pipeline::PreparedContour& one : *driven) all.push_back(std::move(one));
  }
  pipeline::numberParts(all, number);
  return all;
}

// Whether the driven path is another one under the other limits.
bool drivesAlike(const limits::Limits& a, const limits::Limits& b) {
  return a.pathTolerance == b.pathTolerance && a.toolDiameter == b.toolDiameter && a.side == b.side;
}

Result<std::vector<plan::Price>> priceAll(const std::vector<pipeline::PreparedContour>& prepared,
                                          const limits::Limits& limits, RunControl& control) {
  std::map<LimitName, double> saved;
  for (const pipeline::PreparedContour& one : prepared) {
    auto prices = plan::prices(*one.path, limits, {}, 10.0, control);
    if (!prices) return prices.error();
    for (const plan::Price& price : *prices) saved[price.limit] += price.timeSaved;
  }
  std::vector<plan::Price> list;
  for (const auto& [name, seconds] : saved) list.push_back({name, 10.0, seconds});
  std::stable_sort(list.begin(), list.end(),
                   [](const plan::Price& a, const plan::Price& b) { return a.timeSaved > b.timeSaved; });
  return list;
}

}  // namespace

Document::Document(QObject* parent) : QObject(parent), limits_(startingLimits()) {}
Document::~Document() = default;

void Document::open(const QString& path, const pipeline::OpenOptions& options) {
  emit opening(path);
  const std::string file = path.toStdString();
  opener_.start(
      [file, options, limits = limits_](RunControl& control) -> Result<Opening> {
        auto drawing = pipeline::openDrawing(file, options, control);
        if (!drawing) return drawing.error();
        Opening result;
        result.drawing = std::make_shared<const pipeline::OpenedDrawing>(std::move(*drawing));
        auto prepared = prepareAll(*result.drawing, limits, control);
        if (!prepared) return prepared.error();
        result.prepared = std::move(*prepared);
        result.preparedFor = limits;
        return result;
      },
      [this, path, options](Result<Opening> result) { takeOpened(path, options, std::move(result)); });
}

void Document::cancelOpening() {
  opener_.cancel();
}

void Document::takeOpened(const QString& path, const pipeline::OpenOptions& options, Result<Opening> result) {
  if (!result) {
    if (result.error().code == ErrorCode::cancelled) return;
    if (result.error().code == ErrorCode::needsUnit) {
      emit openNeedsUnits(path, options);
      return;
    }
    if (result.error().code == ErrorCode::needsConsent) {
      emit openNeedsSkipping(path, options, text(result.error().message));
      return;
    }
    emit failed(text(result.error().message));
    return;
  }
  drawing_ = result->drawing;
  prepared_ = std::move(result->prepared);
  preparedFor_ = result->preparedFor;
  chosen_ = 0;
  cursor_.reset();
  reference_.clear();
  plans_.assign(prepared_.size(), nullptr);
  undo_.clear();
  emit opened();
  emit chosenChanged();
  emit referenceChanged();
  emit cursorChanged();
  replan();
}

void Document::applyLimits(const limits::Limits& limits) {
  limits_ = limits;
  emit limitsChanged();
  replan();
}

void Document::setLimits(const limits::Limits& limits, const QString& path) {
  limitsPath_ = path;
  undo_.push(new SwapEdit<limits::Limits>(tr("open limits"), {}, limits_, limits,
                                          [this](const limits::Limits& l) { applyLimits(l); }));
}

void Document::setField(const limits::Field& field, std::optional<double> value) {
  if (field.get(limits_) == value) return;
  if (value && !limits::checkValue(field, *value)) return;
  limits::Limits changed = limits_;
  field.put(changed, value);
  const QString label = QString::fromUtf8(field.label.data(), static_cast<qsizetype>(field.label.size()));
  const QString key = QString::fromUtf8(field.name.data(), static_cast<qsizetype>(field.name.size()));
  undo_.push(new SwapEdit<limits::Limits>(tr("change %1").arg(label), key, limits_, changed,
                                          [this](const limits::Limits& l) { applyLimits(l); }));
}

bool Document::loadLimits(const QString& path) {
  auto read = limits::readLimitsFile(path.toStdString());
  if (!read) {
    emit failed(text(read.error().message));
    return false;
  }
  setLimits(*read, path);
  return true;
}

bool Document::saveLimits(const QString& path) {
  if (auto written = write::writeFile(path.toStdString(), limits::toJson(limits_), true); !written) {
    emit failed(text(written.error().message));
    return false;
  }
  limitsPath_ = path;
  emit limitsChanged();
  return true;
}

void Document::choose(int index) {
  if (index < 0 || index >= contourCount() || index == chosen_) return;
  undo_.push(new SwapEdit<int>(tr("choose contour"), QStringLiteral("contour"), chosen_, index,
                               [this](const int& i) {
                                 chosen_ = std::min(i, std::max(0, contourCount() - 1));
                                 cursor_.reset();
                                 emit chosenChanged();
                                 emit cursorChanged();
                               }));
}

const pipeline::PlannedContour* Document::planAt(int index) const {
  return index >= 0 && index < contourCount() ? plans_[static_cast<std::size_t>(index)].get() : nullptr;
}

const pipeline::PreparedContour* Document::preparedAt(int index) const {
  return index >= 0 && index < static_cast<int>(prepared_.size())
             ? &prepared_[static_cast<std::size_t>(index)]
             : nullptr;
}

double Document::totalTime() const {
  double sum = 0.0;
  for (const auto& plan : plans_) sum += plan ? plan->plan.time : 0.0;
  return sum;
}

double Document::totalLowerBound() const {
  double sum = 0.0;
  for (const auto& plan : plans_) sum += plan ? plan->plan.lowerBound : 0.0;
  return sum;
}

void Document::replan() {
  preparer_.cancel();
  planner_.cancel();
  pricer_.cancel();
  prices_.clear();
  if (prepared_.empty()) {
    emit pricesChanged();
    return;
  }
  if (!drivesAlike(limits_, preparedFor_)) {
    prepareAgain();
    return;
  }
  std::size_t nodes = 0;
  for (const pipeline::PreparedContour& one : prepared_) nodes += one.path->size();
  if (nodes <= kNodesAtOnce) {
    RunControl control;
    takePlans(planAll(prepared_, limits_, control));
  } else {
    planner_.start([prepared = prepared_,
                    limits = limits_](RunControl& control) { return planAll(prepared, limits, control); },
                   [this](Result<Plans> plans) { takePlans(std::move(plans)); });
  }
}

// Another tolerance or tool: the path itself changes, which takes longer than a plan does.
void Document::prepareAgain() {
  preparer_.start([drawing = drawing_,
                   limits = limits_](RunControl& control) { return prepareAll(*drawing, limits, control); },
                  [this, limits = limits_](Result<std::vector<pipeline::PreparedContour>> prepared) {
                    preparedFor_ = limits;
                    if (!prepared) {
                      takePlans(prepared.error());
                      return;
                    }
                    prepared_ = std::move(*prepared);
                    plans_.assign(prepared_.size(), nullptr);
                    chosen_ = std::min(chosen_, std::max(0, contourCount() - 1));
                    replan();
                  });
}

void Document::takePlans(Result<Plans> plans) {
  if (!plans) {
    planError_ = text(plans.error().message);
    plans_.assign(prepared_.size(), nullptr);
  } else {
    planError_.clear();
    plans_ = std::move(*plans);
  }
  emit plansChanged();
  emit pricesChanged();
  if (plans) startPrices();
}

void Document::startPrices() {
  pricer_.start([prepared = prepared_,
                 limits = limits_](RunControl& control) { return priceAll(prepared, limits, control); },
                [this](Result<std::vector<plan::Price>> prices) {
                  if (!prices) return;
                  prices_ = std::move(*prices);
                  emit pricesChanged();
                });
}

void Document::pinReference() {
  reference_ = plans_;
  emit referenceChanged();
}

void Document::dropReference() {
  reference_.clear();
  emit referenceChanged();
}

void Document::setCursor(std::optional<double> s) {
  if (s && preparedAt(chosen_) == nullptr) s.reset();
  if (s) *s = std::clamp(*s, 0.0, preparedAt(chosen_)->path->length);
  if (s == cursor_) return;
  cursor_ = s;
  emit cursorChanged();
}

void Document::showPlace(double s, double halfWidth) {
  setCursor(s);
  emit placeShown(s, halfWidth);
}

void Document::setUnits(Units units) {
  if (units == units_) return;
  units_ = units;
  emit unitsChanged();
}

void Document::setColouring(Colouring colouring) {
  if (colouring == colouring_) return;
  colouring_ = colouring;
  emit colouringChanged();
}

std::vector<pipeline::PlannedContour> Document::plansForExport(bool onlyChosen) const {
  std::vector<pipeline::PlannedContour> list;
  for (int i = 0; i < contourCount(); ++i) {
    if (plans_[static_cast<std::size_t>(i)] && (!onlyChosen || i == chosen_))
      list.push_back(*plans_[static_cast<std::size_t>(i)]);
  }
  return list;
}

}  // namespace kf::ui
