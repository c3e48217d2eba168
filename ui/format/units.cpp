// Numbers with their units, as people read them.
// Takes mm, s, mm/s; shows mm or in, s, mm/min or in/min.
#include "ui/format/units.h"

#include <cmath>

namespace kf::ui {
namespace {

constexpr double kInch = 25.4;

}  // namespace

double fromMm(double mm, Units units) {
  return units == Units::inch ? mm / kInch : mm;
}
double toMm(double shown, Units units) {
  return units == Units::inch ? shown * kInch : shown;
}
QString lengthUnit(Units units) {
  return units == Units::inch ? QStringLiteral("in") : QStringLiteral("mm");
}
QString feedUnit(Units units) {
  return units == Units::inch ? QStringLiteral("in/min") : QStringLiteral("mm/min");
}

QString lengthNumber(double mm, Units units) {
  return QString::number(fromMm(mm, units), 'f', units == Units::inch ? 4 : 3);
}

QString feedNumber(double mmPerSecond, Units units) {
  return QString::number(fromMm(mmPerSecond * 60.0, units), 'f', units == Units::inch ? 1 : 0);
}

QString radiusNumber(double mm, Units units) {
  if (mm == 0.0) return QStringLiteral("corner");
  if (!std::isfinite(mm) || mm > 1e6) return QStringLiteral("straight");
  return lengthNumber(mm, units);
}

QString timeNumber(double seconds) {
  return QString::number(seconds, 'f', 3);
}

QString lengthText(double mm, Units units) {
  return lengthNumber(mm, units) + u' ' + lengthUnit(units);
}
QString feedText(double mmPerSecond, Units units) {
  return feedNumber(mmPerSecond, units) + u' ' + feedUnit(units);
}

QString timeText(double seconds) {
  if (!std::isfinite(seconds)) return QStringLiteral("-");
  if (std::abs(seconds) < 60.0) return timeNumber(seconds) + QStringLiteral(" s");
  const auto minutes = static_cast<long long>(seconds / 60.0);
  const QString rest = QString::number(seconds - 60.0 * static_cast<double>(minutes), 'f', 1);
  return QStringLiteral("%1 min %2 s").arg(minutes).arg(rest.rightJustified(4, u'0'));
}

double shownFactor(QStringView fileUnit, Units units) {
  return units == Units::inch && fileUnit.startsWith(u"mm") ? 1.0 / kInch : 1.0;
}

QString shownUnit(QStringView fileUnit, Units units) {
  QString text = fileUnit.toString();
  if (units == Units::inch && text.startsWith(u"mm")) text.replace(0, 2, QStringLiteral("in"));
  text.replace(QStringLiteral("^2"), QStringLiteral("\u00B2"))
      .replace(QStringLiteral("^3"), QStringLiteral("\u00B3"));
  return text;
}

}  // namespace kf::ui
