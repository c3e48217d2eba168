// An undoable change of one value: it swaps the old for the new and back.
// No units here.
#pragma once

#include <QString>
#include <QUndoCommand>
#include <functional>
#include <utility>

namespace kf::ui {

// Changes that carry the same key, one straight after the other, become one: a drag is undone at once.
template <class Value>
class SwapEdit : public QUndoCommand {
 public:
  using Apply = std::function<void(const Value&)>;

  SwapEdit(const QString& text, QString mergeKey, Value before, Value after, Apply apply)
      : QUndoCommand(text),
        mergeKey_(std::move(mergeKey)),
        before_(std::move(before)),
        after_(std::move(after)),
        apply_(std::move(apply)) {}

  int id() const override { return mergeKey_.isEmpty() ? -1 : 1; }
  bool mergeWith(const QUndoCommand* other) override {
    const auto* next = dynamic_cast<const SwapEdit*>(other);
    if (next == nullptr || next->mergeKey_ != mergeKey_) return false;
    after_ = next->after_;
    return true;
  }
  void redo() override { apply_(after_); }
  void undo() override { apply_(before_); }

 private:
  QString mergeKey_;
  Value before_, after_;
  Apply apply_;
};

}  // namespace kf::ui
