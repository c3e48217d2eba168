// What became of the drawing's file.
// Units as shown.
#include "ui/panels/import_panel.h"

namespace kf::ui {
namespace {

QString safe(const std::string& text) {
  return QString::fromStdString(text).toHtmlEscaped();
}

QString tableOf(const std::vector<read::Skipped>& list) {
  QString html = QStringLiteral("<table cellspacing='0' cellpadding='2'>");
  for (const read::Skipped& row : list) {
    html += QStringLiteral("<tr><td align='right'>%1&nbsp;</td><td><b>%2</b>&nbsp;</td><td>%3 (%4)</td></tr>")
                .arg(row.count)
                .arg(safe(row.kind), safe(row.reason), safe(row.firstPlace));
  }
  return html + QStringLiteral("</table>");
}

}  // namespace

ImportPanel::ImportPanel(Document& document, QWidget* parent) : QTextBrowser(parent), document_(document) {
  setAccessibleName(tr("Drawing"));
  setFrameShape(QFrame::NoFrame);
  setOpenLinks(false);
  setWordWrapMode(QTextOption::WrapAtWordBoundaryOrAnywhere);
  for (auto signal : {&Document::opened, &Document::unitsChanged})
    connect(&document_, signal, this, &ImportPanel::refresh);
  refresh();
}

QString ImportPanel::leftOut(const Document& document) {
  if (document.isEmpty() || document.drawing()->skipped.empty()) return {};
  std::size_t count = 0;
  QStringList kinds;
  for (const read::Skipped& row : document.drawing()->skipped) {
    count += row.count;
    kinds << QStringLiteral("%1 %2").arg(row.count).arg(QString::fromStdString(row.kind));
  }
  const qsizetype shown = 4;
  const QString more = kinds.size() > shown ? tr(" and more") : QString();
  return tr("Left out with your consent: %1%2").arg(kinds.mid(0, shown).join(QStringLiteral(", ")), more);
}

void ImportPanel::refresh() {
  if (document_.isEmpty()) {
    setHtml(tr("<p>Open a drawing to see what was read from it.</p>"));
    return;
  }
  const pipeline::OpenedDrawing& drawing = *document_.drawing();
  std::size_t segments = 0;
  for (const contour::Contour& contour : drawing.contours) segments += contour.segments.size();
  QString html = tr("<p><b>%1</b> (%2, drawn in %3)<br>%4 contours of %5 curves; %6 \u00D7 %7 across</p>")
                     .arg(safe(drawing.name), safe(drawing.format), safe(drawing.units))
                     .arg(drawing.contours.size())
                     .arg(segments)
                     .arg(lengthText(drawing.bounds.width(), document_.units()),
                          lengthText(drawing.bounds.height(), document_.units()));
  if (!drawing.skipped.empty()) html += tr("<p>Left out with your consent:</p>") + tableOf(drawing.skipped);
  if (!drawing.ignored.empty()) html += tr("<p>Passed over, as no contour:</p>") + tableOf(drawing.ignored);
  QStringList notes;
  for (const std::string& warning : drawing.warnings)
    notes << QStringLiteral("<li>%1</li>").arg(safe(warning));
  html += notes.isEmpty()
              ? tr("<p>Nothing had to be mended.</p>")
              : tr("<p>Notes:</p><ul style='margin-left:-22px'>%1</ul>").arg(notes.join(QString()));
  html += tr("<p style='color:#5c6470'>%1<br>SHA-256 %2</p>").arg(safe(drawing.path), safe(drawing.sha256));
  setHtml(html);
}

}  // namespace kf::ui
