// What became of the drawing's file: format, unit, what was left out, what was mended.
// Units as shown.
#pragma once

#include <QTextBrowser>

#include "ui/models/document.h"

namespace kf::ui {

class ImportPanel : public QTextBrowser {
  Q_OBJECT

 public:
  explicit ImportPanel(Document& document, QWidget* parent = nullptr);
  // One line about what was left out, for the banner; empty when nothing was.
  static QString leftOut(const Document& document);

 private:
  void refresh();
  Document& document_;
};

}  // namespace kf::ui
