// Colours: an even, colour-blind-safe scale for quantities, a fixed set with dashes for what limits the
// speed. No units here.
#pragma once

#include <QColor>
#include <QString>
#include <Qt>

#include "core/base/limit_name.h"

namespace kf::ui {

// The viridis scale without its darkest tenth, so that it stays readable on a dark ground; part 0 to 1.
// Source: the scale published with matplotlib (CC0), nine anchors, linear between.
QColor scaleColour(double part);

// Okabe and Ito's set; kinds that share a colour differ in dash.
QColor limitColour(LimitName name);
Qt::PenStyle limitDash(LimitName name);
// As people say it: "X acceleration", "feed".
QString limitLabel(LimitName name);

}  // namespace kf::ui
