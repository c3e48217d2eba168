// Colours for quantities and for what limits the speed.
// No units here.
#include "ui/format/colours.h"

#include <algorithm>
#include <array>

namespace kf::ui {
namespace {

constexpr std::array<QRgb, 9> kViridis = {0x440154, 0x472d7b, 0x3b528b, 0x2c728e, 0x21918c,
                                          0x28ae80, 0x5ec962, 0xaddc30, 0xfde725};

struct Look {
  QRgb colour;
  Qt::PenStyle dash;
  const char16_t* label;
};

// In the order of LimitName.
constexpr std::array<Look, kLimitNameCount> kLooks = {{
    {0x009E73, Qt::SolidLine, u"feed"},
    {0xF0E442, Qt::SolidLine, u"X speed"},
    {0xF0E442, Qt::DashLine, u"Y speed"},
    {0xE69F00, Qt::SolidLine, u"centripetal acceleration"},
    {0xCC79A7, Qt::SolidLine, u"chord error"},
    {0xCC79A7, Qt::DashLine, u"block period"},
    {0xCC79A7, Qt::DotLine, u"contour error"},
    {0x009E73, Qt::DashLine, u"chip load"},
    {0x56B4E9, Qt::SolidLine, u"X acceleration"},
    {0x56B4E9, Qt::DashLine, u"Y acceleration"},
    {0x0072B2, Qt::SolidLine, u"tangential acceleration"},
    {0xD55E00, Qt::SolidLine, u"X jerk"},
    {0xD55E00, Qt::DashLine, u"Y jerk"},
    {0xD55E00, Qt::DotLine, u"tangential jerk"},
    {0xBBBBBB, Qt::DashLine, u"joint"},
    {0xBBBBBB, Qt::SolidLine, u"stop"},
    {0xE69F00, Qt::DashLine, u"normal jerk"},
}};

}  // namespace

QColor scaleColour(double part) {
  const double x = (0.1 + 0.9 * std::clamp(part, 0.0, 1.0)) * (kViridis.size() - 1);
  const auto i = std::min(static_cast<std::size_t>(x), kViridis.size() - 2);
  const double f = x - static_cast<double>(i);
  const QColor a(kViridis[i]), b(kViridis[i + 1]);
  const auto mix = [f](int p, int q) { return static_cast<int>(p + f * (q - p) + 0.5); };
  return {mix(a.red(), b.red()), mix(a.green(), b.green()), mix(a.blue(), b.blue())};
}

QColor limitColour(LimitName name) {
  return QColor(kLooks[static_cast<std::size_t>(name)].colour);
}
Qt::PenStyle limitDash(LimitName name) {
  return kLooks[static_cast<std::size_t>(name)].dash;
}
QString limitLabel(LimitName name) {
  return QString::fromUtf16(kLooks[static_cast<std::size_t>(name)].label);
}

}  // namespace kf::ui
