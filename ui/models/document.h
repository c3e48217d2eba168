// What the window shows: the drawing, the limits, the plans, the chosen contour, the cursor; and who changed.
// mm, s inside; units only for display.
#pragma once

#include <QObject>
#include <QString>
#include <QUndoStack>
#include <memory>
#include <optional>
#include <vector>

#include "core/limits/limits.h"
#include "core/pipeline/pipeline.h"
#include "ui/format/units.h"
#include "ui/run/runner.h"

namespace kf::ui {

enum class Colouring { speed, curvature, limit };

// One drawing at a time. Hands out const only; changes go through the members below, and those that a user
// may regret through the undo stack.
class Document : public QObject {
  Q_OBJECT

 public:
  using DrawingPtr = std::shared_ptr<const pipeline::OpenedDrawing>;
  using Plans = std::vector<std::shared_ptr<const pipeline::PlannedContour>>;

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
  // Changes one field, in the file's unit; undoable, and drags merge.
  void setField(const limits::Field& field, std::optional<double> value);
  bool loadLimits(const QString& path);  // false: failed() was emitted
  bool saveLimits(const QString& path);

  int contourCount() const { return static_cast<int>(plans_.size()); }
  int chosen() const { return chosen_; }
  void choose(int index);  // undoable
  const pipeline::PlannedContour* plan() const { return planAt(chosen_); }
  // Null while a contour has no plan (the limits allow none, or it is still being worked out).
  const pipeline::PlannedContour* planAt(int index) const;
  const pipeline::PreparedContour* preparedAt(int index) const;
  double totalTime() const;
  double totalLowerBound() const;
  QString planError() const { return planError_; }

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

  Units units() const { return units_; }
  void setUnits(Units units);
  Colouring colouring() const { return colouring_; }
  void setColouring(Colouring colouring);

  QUndoStack& undoStack() { return undo_; }
  std::vector<pipeline::PlannedContour> plansForExport(bool onlyChosen) const;

 signals:
  void opening(const QString& path);
  void opened();
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

 private:
  struct Opening {
    DrawingPtr drawing;
    std::vector<pipeline::PreparedContour> prepared;
    limits::Limits preparedFor;
  };

  void takeOpened(const QString& path, const pipeline::OpenOptions& options, Result<Opening> result);
  void applyLimits(const limits::Limits& limits);
  void replan();
  void prepareAgain();
  void takePlans(Result<Plans> plans);
  void startPrices();

  DrawingPtr drawing_;
  std::vector<pipeline::PreparedContour> prepared_;
  limits::Limits preparedFor_;  // the limits that prepared_ was made for
  limits::Limits limits_;
  QString limitsPath_;
  Plans plans_, reference_;
  QString planError_;
  std::vector<plan::Price> prices_;
  int chosen_ = 0;
  std::optional<double> cursor_;
  Units units_ = Units::mm;
  Colouring colouring_ = Colouring::speed;
  QUndoStack undo_;
  Runner<Opening> opener_;
  Runner<std::vector<pipeline::PreparedContour>> preparer_;
  Runner<Plans> planner_;
  Runner<std::vector<plan::Price>> pricer_;
};

}  // namespace kf::ui
