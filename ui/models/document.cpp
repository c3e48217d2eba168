// What the window shows, and who changed.
// mm, s inside; units only for display.
#include "ui/models/document.h"

#include <algorithm>

#include "core/write/file_writer.h"
#include "ui/edits/swap_edit.h"

namespace kf::ui {
namespace {

// Up to so many nodes an acceleration-limited plan is made at once, within a few milliseconds; above, in the
// background.
constexpr std::size_t kNodesAtOnce = 40'000;
constexpr qint64 kPatience = 1000;  // ms; a background plan that takes longer is given up for a newer one

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

}  // namespace

Document::Document(QObject* parent)
    : QObject(parent), limits_(startingLimits()), savedLimits_(startingLimits()) {
  priceDelay_.setSingleShot(true);
  priceDelay_.setInterval(120);
  connect(&priceDelay_, &QTimer::timeout, this, &Document::startPrices);
}
Document::~Document() = default;

void Document::open(const QString& path, const pipeline::OpenOptions& options) {
  emit opening(path);
  opener_.start([file = path.toStdString(), options, limits = limits_, choices = choices_](
                    RunControl& control) { return openAll(file, options, limits, choices, control); },
                [this, path, options, limits = limits_, choices = choices_](Result<Opened> result) {
                  if (result) {
                    preparedFor_ = limits;
                    preparedChoices_ = choices;
                  }
                  takeOpened(path, options, std::move(result));
                });
}

void Document::cancelOpening() {
  opener_.cancel();
  emit openingEnded();
}

void Document::takeOpened(const QString& path, const pipeline::OpenOptions& options, Result<Opened> result) {
  emit openingEnded();
  if (!result) {
    switch (result.error().code) {
      case ErrorCode::cancelled:
        return;
      case ErrorCode::needsUnit:
        emit openNeedsUnits(path, options);
        return;
      case ErrorCode::needsConsent:
        emit openNeedsSkipping(path, options, text(result.error().message));
        return;
      default:
        emit failed(text(result.error().message));
        return;
    }
  }
  drawing_ = result->drawing;
  prepared_ = std::move(result->prepared);
  choices_.jointChoices.clear();  // they belong to the drawing before
  chosen_ = 0;
  cursor_.reset();
  stretch_.reset();
  reference_.clear();
  plans_.assign(prepared_.size(), nullptr);
  undo_.clear();
  emit opened();
  emit chosenChanged();
  emit referenceChanged();
  emit cursorChanged();
  emit choicesChanged();
  replan();
}

void Document::pushLimits(const QString& what, const QString& key, const limits::Limits& changed) {
  if (changed == limits_) return;
  undo_.push(new SwapEdit<limits::Limits>(what, key, limits_, changed,
                                          [this](const limits::Limits& l) { applyLimits(l); }));
}

void Document::applyLimits(const limits::Limits& limits) {
  limits_ = limits;
  emit limitsChanged();
  replan();
}

void Document::setLimits(const limits::Limits& limits, const QString& path) {
  limitsPath_ = path;
  savedLimits_ = limits;
  pushLimits(tr("open limits"), {}, limits);
}

void Document::setField(const limits::Field& field, std::optional<double> value) {
  if (field.get(limits_) == value) return;
  if (value && !limits::checkValue(field, *value)) return;
  limits::Limits changed = limits_;
  field.put(changed, value);
  const QString label = QString::fromUtf8(field.label.data(), static_cast<qsizetype>(field.label.size()));
  const QString key = QString::fromUtf8(field.name.data(), static_cast<qsizetype>(field.name.size()));
  pushLimits(tr("change %1").arg(label), key + u'#' + QString::number(gesture_), changed);
}

void Document::setSide(limits::Side side) {
  limits::Limits changed = limits_;
  changed.side = side;
  pushLimits(tr("change tool side"), {}, changed);
}

void Document::setLimitsName(const QString& name) {
  limits::Limits changed = limits_;
  changed.name = name.toStdString();
  pushLimits(tr("rename limits"), {}, changed);
}

void Document::confirmLimitsAreMine() {
  limits::Limits changed = limits_;
  changed.example = false;
  pushLimits(tr("take limits as own"), {}, changed);
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
  savedLimits_ = limits_;
  emit limitsChanged();
  return true;
}

void Document::pushChoices(const QString& what, const pipeline::PlanOptions& changed) {
  undo_.push(new SwapEdit<pipeline::PlanOptions>(what, {}, choices_, changed,
                                                 [this](const pipeline::PlanOptions& c) {
                                                   choices_ = c;
                                                   emit choicesChanged();
                                                   replan();
                                                 }));
}

void Document::setLaw(std::optional<plan::Law> law) {
  if (law == choices_.law) return;
  pipeline::PlanOptions changed = choices_;
  changed.law = law;
  pushChoices(tr("change what is planned for"), changed);
}

void Document::setJoints(plan::Joints joints) {
  if (joints == choices_.joints) return;
  pipeline::PlanOptions changed = choices_;
  changed.joints = joints;
  pushChoices(tr("change corners"), changed);
}

void Document::setJointBlended(int contourNumber, std::size_t before, bool blend) {
  pipeline::PlanOptions changed = choices_;
  auto& list = changed.jointChoices[contourNumber];
  const auto at = std::find_if(list.begin(), list.end(),
                               [before](const construct::JointChoice& c) { return c.before == before; });
  if (blend) {
    if (at == list.end()) return;
    list.erase(at);  // blending is what happens without a choice
    if (list.empty()) changed.jointChoices.erase(contourNumber);
  } else {
    if (at != list.end()) return;
    list.push_back({before, false, std::nullopt});
  }
  pushChoices(blend ? tr("blend joint") : tr("keep joint exact"), changed);
}

void Document::choose(int index) {
  if (index < 0 || index >= contourCount() || index == chosen_) return;
  undo_.push(new SwapEdit<int>(tr("choose contour"), QStringLiteral("contour"), chosen_, index,
                               [this](const int& i) {
                                 chosen_ = std::min(i, std::max(0, contourCount() - 1));
                                 cursor_.reset();
                                 stretch_.reset();
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
  priceDelay_.stop();
  pricer_.cancel();
  prices_.clear();
  if (prepared_.empty()) {
    emit pricesChanged();
    return;
  }
  if (!drivesAlike(limits_, choices_, preparedFor_, preparedChoices_)) {
    planner_.cancel();
    prepareAgain();
    return;
  }
  preparer_.cancel();
  std::size_t nodes = 0;
  for (const pipeline::PreparedContour& one : prepared_) nodes += one.path->size();
  if (nodes > kNodesAtOnce) {
    planInBackground();
    return;
  }
  planner_.cancel();
  RunControl control;
  pipeline::PlanOptions quick = choices_;
  quick.law = plan::Law::acceleration;
  refining_ = law() == plan::Law::jerk;
  takePlans(planAll(prepared_, limits_, quick, control));
  if (refining_ && planError_.isEmpty()) planInBackground();
}

// A plan under way is shown before the next one starts, so that a drag shows something; unless it takes long.
void Document::planInBackground() {
  if (planner_.isBusy() && planClock_.elapsed() < kPatience) {
    planAgain_ = true;
    return;
  }
  planAgain_ = false;
  planClock_.start();
  planner_.start([prepared = prepared_, limits = limits_, choices = choices_](
                     RunControl& control) { return planAll(prepared, limits, choices, control); },
                 [this](Result<Planned> planned) {
                   const bool again = planAgain_;
                   refining_ = false;
                   takePlans(std::move(planned));
                   if (again) replan();
                 });
  emit planningChanged();
}

// Another tolerance, tool or joint: the path itself changes, which takes longer than a plan does.
void Document::prepareAgain() {
  preparer_.start(
      [drawing = drawing_, limits = limits_, choices = choices_](RunControl& control) {
        return prepareAll(*drawing, limits, choices, control);
      },
      [this, limits = limits_, choices = choices_](Result<std::vector<pipeline::PreparedContour>> prepared) {
        preparedFor_ = limits;
        preparedChoices_ = choices;
        if (!prepared) {
          takePlans(prepared.error());
          return;
        }
        prepared_ = std::move(*prepared);
        plans_.assign(prepared_.size(), nullptr);
        chosen_ = std::min(chosen_, std::max(0, contourCount() - 1));
        if (cursor_) cursor_ = std::min(*cursor_, preparedAt(chosen_)->path->length);
        replan();
      });
  emit planningChanged();
}

void Document::takePlans(Result<Planned> planned) {
  const bool usable = planned.ok();
  if (usable) {
    planError_ = planned->problem;
    plans_ = std::move(planned->plans);
  } else {
    planError_ = text(planned.error().message);
    plans_.assign(prepared_.size(), nullptr);
  }
  emit planningChanged();
  emit plansChanged();
  emit pricesChanged();
  if (usable && planError_.isEmpty() && !refining_) priceDelay_.start();
}

void Document::startPrices() {
  pricer_.start([prepared = prepared_, limits = limits_, choices = choices_](
                    RunControl& control) { return priceAll(prepared, limits, choices, control); },
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

void Document::setStretch(std::optional<std::pair<double, double>> stretch) {
  if (stretch == stretch_) return;
  stretch_ = stretch;
  emit stretchChanged();
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
