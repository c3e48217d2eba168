// Numbers with their units, as people read them.
// Takes mm, s, mm/s; shows mm or in, s, mm/min or in/min.
#pragma once

#include <QString>

namespace kf::ui {

enum class Units { mm, inch };

double fromMm(double mm, Units units);
double toMm(double shown, Units units);
QString lengthUnit(Units units);  // "mm", "in"
QString feedUnit(Units units);    // "mm/min", "in/min"

// Numbers alone, with digits that suit the unit.
QString lengthNumber(double mm, Units units);
QString feedNumber(double mmPerSecond, Units units);
QString radiusNumber(double mm, Units units);  // "straight", "corner"
QString timeNumber(double seconds);

// Numbers with their unit.
QString lengthText(double mm, Units units);
QString feedText(double mmPerSecond, Units units);
QString timeText(double seconds);  // "12.345 s", "3 min 04.2 s"

// A value in one of the units of the limits file, shown in the chosen units ("mm/min" becomes "in/min").
double shownFactor(QStringView fileUnit, Units units);
QString shownUnit(QStringView fileUnit, Units units);

}  // namespace kf::ui
