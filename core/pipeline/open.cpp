// Opening a drawing: read, scale to mm, chain.
// Lengths in mm.
#include <filesystem>

#include <fmt/format.h>

#include "core/base/sha256.h"
#include "core/contour/chain.h"
#include "core/pipeline/pipeline.h"
#include "core/read/text.h"

namespace kf::pipeline {
namespace {

constexpr double kLargestPlausible = 20'000.0, kSmallestPlausible = 1.0;  // mm

std::string plural(std::size_t n, std::string_view one, std::string_view many) {
  return fmt::format("{} {}", n, n == 1 ? one : many);
}

std::size_t countOf(const std::vector<read::Skipped>& list) {
  std::size_t n = 0;
  for (const read::Skipped& row : list) n += row.count;
  return n;
}

void warnOf(OpenedDrawing& opened, const contour::ChainReport& chained,
            const std::vector<std::string>& fromReader) {
  if (!opened.skipped.empty()) {
    opened.warnings.push_back(fmt::format("left out {}: {}",
                                          plural(countOf(opened.skipped), "entity", "entities"),
                                          read::describe(opened.skipped)));
  }
  if (!opened.ignored.empty())
    opened.warnings.push_back("passed over, as no contour: " + read::describe(opened.ignored));
  opened.warnings.insert(opened.warnings.end(), fromReader.begin(), fromReader.end());
  if (chained.zeroLengthDropped > 0) {
    opened.warnings.push_back("left out " + plural(chained.zeroLengthDropped, "entity", "entities") +
                              " without length");
  }
  if (chained.largestGap > 1e-6)
    opened.warnings.push_back(
        fmt::format("closed gaps of up to {:.3g} mm between neighbours", chained.largestGap));
  if (chained.branchPoints > 0) {
    opened.warnings.push_back(plural(chained.branchPoints, "place", "places") +
                              " where more than two ends meet; the straightest continuation was taken");
  }
  const double size = std::max(opened.bounds.width(), opened.bounds.height());
  if (size > kLargestPlausible || size < kSmallestPlausible) {
    opened.warnings.push_back(
        fmt::format("the drawing is {:.4g} mm across; check its units ({})", size, opened.units));
  }
}

}  // namespace

Result<OpenedDrawing> openDrawing(const std::string& path, const OpenOptions& options, RunControl& control) {
  read::ReadOptions reading;
  reading.layers = options.layers;
  auto bytes = read::readBytes(path, reading.maxBytes);
  if (control.isCancelled()) return Error{ErrorCode::cancelled, path + ": stopped while reading"};
  if (!bytes) return bytes.error();
  auto drawing = read::readDrawingBytes(*bytes, path, reading, control);
  if (!drawing) return drawing.error();
  OpenedDrawing opened;
  opened.path = path;
  opened.name = path == "-" ? "standard input" : std::filesystem::path(path).filename().string();
  opened.format = drawing->format;
  opened.sha256 = sha256Hex(*bytes);
  bytes->clear();
  bytes->shrink_to_fit();
  opened.skipped = std::move(drawing->skipped);
  opened.ignored = std::move(drawing->ignored);
  if (!opened.skipped.empty() && !options.allowSkipped) {
    return Error{ErrorCode::needsConsent,
                 fmt::format("{}: {} can't be used: {}; go on without with --allow-skipped, or redraw them",
                             opened.name, plural(countOf(opened.skipped), "entity", "entities"),
                             read::describe(opened.skipped))};
  }
  if (drawing->curves.empty()) {
    return Error{ErrorCode::unsupported,
                 fmt::format("{} holds no curve that a tool could follow{}", opened.name,
                             opened.ignored.empty() ? std::string() : ": " + read::describe(opened.ignored))};
  }
  if (!drawing->millimetresPerUnit && !options.millimetresPerUnit) {
    return Error{ErrorCode::needsUnit,
                 opened.name + " does not say its unit; give it with --units mm or --units in"};
  }
  const double scale =
      drawing->millimetresPerUnit ? *drawing->millimetresPerUnit : *options.millimetresPerUnit;
  opened.units = drawing->millimetresPerUnit ? drawing->unitName : scale == 25.4 ? "in" : "mm";
  if (scale != 1.0) {
    for (contour::LooseCurve& loose : drawing->curves)
      loose.curve = loose.curve.transformed(curve::Affine2::scaling(scale, scale));
  }
  contour::ChainOptions chaining;
  chaining.tolerance = options.chainTolerance;
  auto chained = contour::chain(drawing->curves, chaining, control);
  if (!chained) return Error{chained.error().code, opened.name + ": " + chained.error().message};
  opened.contours = std::move(chained->contours);
  for (const contour::Contour& c : opened.contours) opened.bounds.include(contour::bounds(c));
  if (opened.contours.empty())
    return Error{ErrorCode::unsupported, opened.name + " holds only entities without length"};
  warnOf(opened, *chained, drawing->warnings);
  control.report(1.0);
  return opened;
}

}  // namespace kf::pipeline
