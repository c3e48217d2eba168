// Where the time goes, limit by limit, and what raising each would save.
// s.
#pragma once

#include <QWidget>
#include <vector>

#include "ui/models/document.h"

namespace kf::ui {

// A bar of the whole time, parted by what limits; below it a key with seconds, percent and the saving.
class TimeStrip : public QWidget {
  Q_OBJECT

 public:
  explicit TimeStrip(Document& document, QWidget* parent = nullptr);
  QSize sizeHint() const override;
  QSize minimumSizeHint() const override { return sizeHint(); }

 protected:
  void paintEvent(QPaintEvent* event) override;

 private:
  struct Share {
    LimitName name;
    double seconds, saved;
    bool priced;
  };
  std::vector<Share> shares() const;
  Document& document_;
};

}  // namespace kf::ui
