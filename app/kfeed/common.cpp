// What the verbs share: messages, exit codes, choice of contours.
// Lengths in mm.
#include <algorithm>
#include <cmath>
#include <cstdio>

#include <fmt/format.h>

#include "app/kfeed/verbs.h"
#include "core/read/text.h"

namespace kf::kfeed {

int exitCodeFor(ErrorCode code) {
  switch (code) {
    case ErrorCode::invalidArgument:
      return kUsage;
    case ErrorCode::cannotRead:
    case ErrorCode::unsupported:
    case ErrorCode::notConverged:
    case ErrorCode::needsUnit:
    case ErrorCode::needsConsent:
      return kUnreadable;
    case ErrorCode::cannotWrite:
      return kUnwritable;
    case ErrorCode::infeasible:
    case ErrorCode::auditFailed:
      return kNo;
    case ErrorCode::cancelled:
      return kInterrupted;
  }
  return kNo;
}

int fail(const Error& error) {
  fmt::print(stderr, "kfeed: {}\n", error.message);
  return exitCodeFor(error.code);
}

void warn(const Request& request, const std::string& text) {
  if (!request.quiet) fmt::print(stderr, "kfeed: {}\n", text);
}

pipeline::OpenOptions openOptions(const Request& request) {
  pipeline::OpenOptions options;
  if (!request.units.empty()) options.millimetresPerUnit = request.units == "in" ? 25.4 : 1.0;
  options.allowSkipped = request.allowSkipped;
  options.layers = request.layers;
  return options;
}

Result<std::vector<int>> contourNumbers(const std::string& list, int count) {
  std::vector<int> numbers;
  if (list.empty()) {
    for (int i = 1; i <= count; ++i) numbers.push_back(i);
    return numbers;
  }
  const auto bad = [&](std::string_view part) {
    return Error{ErrorCode::invalidArgument,
                 fmt::format("'{}' in --contour is not a number or range from 1 to {}; write it like 1,3-5",
                             part, count)};
  };
  std::string_view rest = list;
  for (;;) {
    const std::size_t comma = rest.find(',');
    const std::string_view part = rest.substr(0, comma);
    const std::size_t dash = part.find('-');
    const auto low = read::parseInteger(part.substr(0, dash));
    const auto high = dash == std::string_view::npos ? low : read::parseInteger(part.substr(dash + 1));
    if (!low || !high || *low < 1 || *high > count || *low > *high) return bad(part);
    for (long long i = *low; i <= *high; ++i) {
      if (std::find(numbers.begin(), numbers.end(), static_cast<int>(i)) == numbers.end())
        numbers.push_back(static_cast<int>(i));
    }
    if (comma == std::string_view::npos) return numbers;
    rest.remove_prefix(comma + 1);
  }
}

Result<std::vector<pipeline::PreparedContour>> prepareChosen(const pipeline::OpenedDrawing& drawing,
                                                             const Request& request,
                                                             const limits::Limits* limits,
                                                             const pipeline::PlanOptions& options,
                                                             RunControl& control) {
  auto numbers = contourNumbers(request.contours, static_cast<int>(drawing.contours.size()));
  if (!numbers) return numbers.error();
  std::vector<pipeline::PreparedContour> prepared;
  for (int number : *numbers) {
    const contour::Contour& contour = drawing.contours[static_cast<std::size_t>(number - 1)];
    if (limits != nullptr) {
      auto driven = pipeline::prepareDriven(contour, number, *limits, options, control);
      if (!driven) return Error{driven.error().code, drawing.name + ": " + driven.error().message};
      for (pipeline::PreparedContour& one : *driven) prepared.push_back(std::move(one));
      continue;
    }
    auto one = pipeline::prepareContour(contour, number, options, control);
    if (!one) return Error{one.error().code, drawing.name + ": " + one.error().message};
    prepared.push_back(std::move(*one));
  }
  pipeline::numberParts(prepared, static_cast<int>(drawing.contours.size()));
  return prepared;
}

std::string radiusText(double radius) {
  if (radius == 0.0) return "corner";
  return std::isfinite(radius) ? fmt::format("{:.3f}", radius) : "straight";
}

}  // namespace kf::kfeed
