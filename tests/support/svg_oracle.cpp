// SVG icons of a folder against the ink of an independent renderer (Qt SVG): no ink is more than
// 2 of 512 pixels outside our extent, and at most 6 pixels inside it are bare. Lengths in pixels.
#include <QImage>
#include <QPainter>
#include <QSvgRenderer>

#include <algorithm>
#include <array>
#include <cmath>
#include <cstdio>
#include <filesystem>
#include <string>
#include <vector>

#include "core/read/drawing.h"

namespace {

constexpr int kSide = 512;
constexpr double kOutside = 2.0;
constexpr double kInside = 6.0;  // a tip narrower than a pixel leaves no ink

struct Extent {
  double left = kSide, top = kSide, right = 0.0, bottom = 0.0;
};

Extent inkOf(QSvgRenderer& renderer) {
  QImage picture(kSide, kSide, QImage::Format_ARGB32_Premultiplied);
  picture.fill(Qt::transparent);
  QPainter painter(&picture);
  renderer.render(&painter, QRectF(0, 0, kSide, kSide));
  painter.end();
  Extent extent;
  for (int y = 0; y < kSide; ++y) {
    const auto* row = reinterpret_cast<const QRgb*>(picture.constScanLine(y));
    for (int x = 0; x < kSide; ++x) {
      if (qAlpha(row[x]) == 0) continue;
      extent.left = std::min<double>(extent.left, x);
      extent.right = std::max<double>(extent.right, x + 1);
      extent.top = std::min<double>(extent.top, y);
      extent.bottom = std::max<double>(extent.bottom, y + 1);
    }
  }
  return extent;
}

// The page is square and its lower left corner the origin.
Extent extentOf(const kf::read::Drawing& drawing, double page) {
  kf::curve::Box box;
  for (const auto& loose : drawing.curves) box.include(loose.curve.bounds());
  const double scale = kSide / page;
  const auto clamped = [](double value) { return std::clamp<double>(value, 0.0, kSide); };
  return {clamped(box.low.x * scale), clamped((page - box.high.y) * scale), clamped(box.high.x * scale),
          clamped((page - box.low.y) * scale)};
}

bool agree(const std::string& path) {
  kf::RunControl control;
  const auto drawing = kf::read::readDrawing(path, {}, control);
  QSvgRenderer renderer(QString::fromStdString(path));
  if (!drawing || !renderer.isValid()) {
    std::printf("%s: %s\n", path.c_str(), drawing ? "Qt can't read it" : drawing.error().message.c_str());
    return false;
  }
  const Extent ours = extentOf(*drawing, renderer.defaultSize().width()), ink = inkOf(renderer);
  const std::array<double, 4> inside = {ink.left - ours.left, ours.right - ink.right, ink.top - ours.top,
                                        ours.bottom - ink.bottom};
  const auto [least, most] = std::minmax_element(inside.begin(), inside.end());
  if (*least >= -kOutside && *most <= kInside) return true;
  std::printf("%s: from %.1f outside to %.1f inside (ours %.1f %.1f %.1f %.1f, ink %.0f %.0f %.0f %.0f)\n",
              path.c_str(), -*least, *most, ours.left, ours.top, ours.right, ours.bottom, ink.left, ink.top,
              ink.right, ink.bottom);
  return false;
}

}  // namespace

int main(int count, char** arguments) {
  std::error_code failure;
  std::vector<std::string> paths;
  for (const auto& entry : std::filesystem::directory_iterator(count > 1 ? arguments[1] : "", failure)) {
    if (entry.path().extension() == ".svg") paths.push_back(entry.path().string());
  }
  std::sort(paths.begin(), paths.end());
  if (paths.empty()) {
    std::printf("no icons there; install bootstrap-icons\n");
    return 77;
  }
  const auto apart =
      std::count_if(paths.begin(), paths.end(), [](const std::string& path) { return !agree(path); });
  std::printf("%zu icons, %td differ\n", paths.size(), apart);
  return apart == 0 ? 0 : 1;
}
