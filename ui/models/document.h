// What the window shows: the drawing, the limits, the plans, the chosen contour, the cursor; and who changed.
// mm, s inside; units only for display.
#pragma once

#include <QElapsedTimer>
#include <QObject>
#include <QString>
#include <QTimer>
#include <QUndoStack>
#include <memory>
#include <optional>
#include <utility>
#include <vector>

#include "core/limits/limits.h"
#include "core/pipeline/pipeline.h"
#include "ui/format/units.h"
#include "ui/models/planning.h"
#include "ui/run/runner.h"

namespace kf::ui {

enum class Colouring { speed, curvature, limit };

// One drawing at a time. Hands out const only; changes go through the members below, and those that a user
// may regret through the undo stack.
class Document : public QObject {
  Q_OBJECT

 public:
  using DrawingPtr = std::shared_ptr<const pipeline::OpenedDrawing>;
  using Plans = std::vector<PlanPtr>;

  explicit Document(QObject* parent = nullptr);
  ~Document() override;

  // Opens in the background; ends in opened(), openNeedsUnits(), openNeedsSkipping() or failed().
  void open(const QString& path, const pipeline::OpenOptions& options);
  bool isOpening() const { return opener_.isBusy(); }
  void cancelOpening();

  bool isEmpty() const { return drawing_ == nullptr; }
  const pipeline::OpenedDrawing* drawing() const { return drawing_.get(); }
  DrawingPtr drawingPtr() const { return drawing_; }

  const limits::Limits& limits() const { return limits_; }
  QString limitsPath() const { return limitsPath_; }
  // Replaces all limits at once (a file was opened); undoable.
  void setLimits(const limits::Limits& limits, const QString& path);
  // Changes one field, in the file's unit; undoable. Changes of one field merge until endGesture().
  void setField(const limits::Field& field, std::optional<double> value);
  void endGesture() { ++gesture_; }
  void setSide(limits::Side side);          // undoable
  void setLimitsName(const QString& name);  // undoable
  void confirmLimitsAreMine();              // no example any more; undoable
  bool loadLimits(const QString& path);     // false: failed() was emitted
  bool saveLimits(const QString& path);     // false: failed() was emitted
  bool limitsAreSaved() const { return limits_ == savedLimits_; }

  // How the path is driven and timed. All undoable.
  const pipeline::PlanOptions& choices() const { return choices_; }
  void setLaw(std::optional<plan::Law> law);
  void setJoints(plan::Joints joints);
  // `before` as in construct::JointReport; by the drawing's contour number.
  void setJointBlended(int contourNumber, std::size_t before, bool blend);
  // The law that the shown plans follow.
  plan::Law law() const { return pipeline::lawFor(limits_, choices_); }

  int contourCount() const { return static_cast<int>(plans_.size()); }
  int chosen() const { return chosen_; }
  void choose(int index);  // undoable
  const pipeline::PlannedContour* plan() const { return planAt(chosen_); }
  // Null while a contour has no plan (the limits allow none, or it is still being worked out).
  const pipeline::PlannedContour* planAt(int index) const;
  PlanPtr planPtr(int index) const {
    return planAt(index) == nullptr ? nullptr : plans_[static_cast<std::size_t>(index)];
  }
  const pipeline::PreparedContour* preparedAt(int index) const;
  double totalTime() const;
  double totalLowerBound() const;
  // True while a quick plan is shown (accelerations only) and the jerk-limited one is worked out behind it.
  bool isRefining() const { return refining_; }
  QString planError() const { return planError_; }
  // Paths or plans are being worked out; what is shown belongs to the values before.
  bool isPlanning() const { return preparer_.isBusy() || planner_.isBusy(); }

  // What +10 % of each limit saves over all contours; empty while unknown.
  const std::vector<plan::Price>& prices() const { return prices_; }

  // The pinned plans, to compare with.
  const Plans& reference() const { return reference_; }
  void pinReference();
  void dropReference();

  // Arc length on the chosen contour; empty when nothing is pointed at.
  std::optional<double> cursor() const { return cursor_; }
  void setCursor(std::optional<double> s);
  // Moves the cursor and asks canvas and plot to bring the place into view.
  void showPlace(double s, double halfWidth);
  // The stretch of the chosen contour that the plot shows, as arc lengths; empty when it shows all of it.
  std::optional<std::pair<double, double>> stretch() const { return stretch_; }
  void setStretch(std::optional<std::pair<double, double>> stretch);

  Units units() const { return units_; }
  void setUnits(Units units);
  Colouring colouring() const { return colouring_; }
  void setColouring(Colouring colouring);

  QUndoStack& undoStack() { return undo_; }
  std::vector<pipeline::PlannedContour> plansForExport(bool onlyChosen) const;

 signals:
  void opening(const QString& path);
  void opened();
  void openingEnded();  // in whatever way, before any of the others
  // Ask, and open again with the answer in the options.
  void openNeedsUnits(const QString& path, const pipeline::OpenOptions& options);
  void openNeedsSkipping(const QString& path, const pipeline::OpenOptions& options, const QString& message);
  void failed(const QString& message);
  void plansChanged();
  void pricesChanged();
  void limitsChanged();
  void chosenChanged();
  void cursorChanged();
  void placeShown(double s, double halfWidth);
  void unitsChanged();
  void colouringChanged();
  void referenceChanged();
  void choicesChanged();
  void planningChanged();
  void stretchChanged();

 private:
  void takeOpened(const QString& path, const pipeline::OpenOptions& options, Result<Opened> result);
  void pushLimits(const QString& text, const QString& key, const limits::Limits& changed);
  void pushChoices(const QString& text, const pipeline::PlanOptions& changed);
  void applyLimits(const limits::Limits& limits);
  void replan();
  void prepareAgain();
  void planInBackground();
  void takePlans(Result<Planned> planned);
  bool refining_ = false;
  void startPrices();

  DrawingPtr drawing_;
  std::vector<pipeline::PreparedContour> prepared_;
  limits::Limits preparedFor_;  // the limits and choices that prepared_ was made for
  pipeline::PlanOptions preparedChoices_;
  limits::Limits limits_, savedLimits_;
  pipeline::PlanOptions choices_;
  QString limitsPath_;
  Plans plans_, reference_;
  QString planError_;
  std::vector<plan::Price> prices_;
  int chosen_ = 0;
  std::optional<double> cursor_;
  std::optional<std::pair<double, double>> stretch_;
  std::size_t gesture_ = 0;
  bool planAgain_ = false;  // limits changed while a plan was being made
  QElapsedTimer planClock_;
  QTimer priceDelay_;  // prices wait until a drag pauses
  Units units_ = Units::mm;
  Colouring colouring_ = Colouring::speed;
  QUndoStack undo_;
  Runner<Opened> opener_;
  Runner<std::vector<pipeline::PreparedContour>> preparer_;
  Runner<Planned> planner_;
  Runner<std::vector<plan::Price>> pricer_;
};

}  // namespace kf::ui
