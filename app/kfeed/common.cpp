// What the verbs share: messages, exit codes, choice of contours.
// Lengths in mm.
#include <algorithm>
#include <cmath>
#include <cstdio>
#include <mutex>

#include <fmt/format.h>

#include "app/kfeed/verbs.h"
#include "core/base/parallel.h"
#include "core/read/text.h"

namespace kf::kfeed {
namespace {

constexpr double kStraightFrom = 1e6;  // mm: no machine tells such a bend from a straight

void write(FILE* stream, std::string_view text) {
  std::fwrite(text.data(), 1, text.size(), stream);
}

// How many bytes the UTF-8 character at `i` has; 0 when there is none.
std::size_t characterAt(std::string_view text, std::size_t i) {
  const auto byte = [&](std::size_t k) { return static_cast<unsigned char>(text[k]); };
  const std::size_t length = byte(i) < 0x80   ? 1
                             : byte(i) < 0xC2 ? 0
                             : byte(i) < 0xE0 ? 2
                             : byte(i) < 0xF0 ? 3
                             : byte(i) < 0xF5 ? 4
                                              : 0;
  if (length == 0 || i + length > text.size()) return 0;
  for (std::size_t k = 1; k < length; ++k) {
    if ((byte(i + k) & 0xC0U) != 0x80U) return 0;
  }
  const bool control =
      byte(i) < 32 || byte(i) == 127 || (byte(i) == 0xC2 && length == 2 && byte(i + 1) < 0xA0);
  return control ? 0 : length;
}

// One line for a terminal: what a damaged file brought into a message can neither end the line nor steer it.
std::string oneLine(std::string_view text) {
  std::string line;
  for (std::size_t i = 0; i < text.size();) {
    const std::size_t n = characterAt(text, i);
    line += n == 0 ? std::string_view("?") : text.substr(i, n);
    i += n == 0 ? 1 : n;
  }
  return line;
}

}  // namespace

void Answer::warn(const Request& request, std::string_view text) {
  if (!request.quiet) err += fmt::format("kfeed: {}\n", oneLine(text));
}

void Answer::fail(const Error& error) {
  code = exitCodeFor(error.code);
  if (code != kInterrupted) err += fmt::format("kfeed: {}\n", oneLine(error.message));  // main says it once
}

bool say(const Answer& answer) {
  write(stderr, answer.err);
  std::fflush(stderr);
  write(stdout, answer.out);
  return std::fflush(stdout) == 0 && std::ferror(stdout) == 0;
}

int forEachDrawing(const Request& request, RunControl& control,
                   const std::function<Answer(const std::string& path, int threads)>& work) {
  const std::size_t count = request.drawings.size();
  std::vector<std::optional<Answer>> answers(count);
  std::size_t said = 0;
  int worst = kDone;
  std::mutex talking;
  forEachIndex(count, request.threads, [&](std::size_t i) {
    if (control.isCancelled()) return;
    Answer answer = work(request.drawings[i], count > 1 ? 1 : request.threads);
    const std::lock_guard lock(talking);
    answers[i] = std::move(answer);
    for (; said < count && answers[said]; ++said) {
      const Answer& next = *answers[said];
      if (!say(next)) worst = std::max<int>(worst, kUnwritable);
      worst = std::max(worst, next.code);
      answers[said]->out.clear();
    }
  });
  // A drawing that was done before an interrupt has its files; what was begun has left none.
  return said < count ? kInterrupted : worst;
}

int exitCodeFor(ErrorCode code) {
  switch (code) {
    case ErrorCode::invalidArgument:
      return kUsage;
    case ErrorCode::cannotRead:
    case ErrorCode::unsupported:
    case ErrorCode::needsUnit:
    case ErrorCode::needsConsent:
    case ErrorCode::notConverged:
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
                                                             const Request& request, int threads,
                                                             const limits::Limits* limits,
                                                             const pipeline::PlanOptions& options,
                                                             RunControl& control) {
  using Prepared = Result<std::vector<pipeline::PreparedContour>>;
  auto numbers = contourNumbers(request.contours, static_cast<int>(drawing.contours.size()));
  if (!numbers) return numbers.error();
  std::vector<std::optional<Prepared>> parts(numbers->size());
  forEachIndex(parts.size(), threads, [&](std::size_t i) {
    const int number = (*numbers)[i];
    const contour::Contour& contour = drawing.contours[static_cast<std::size_t>(number - 1)];
    if (limits != nullptr) {
      parts[i] = pipeline::prepareDriven(contour, number, *limits, options, control);
      return;
    }
    auto one = pipeline::prepareContour(contour, number, options, control);
    if (one) {
      parts[i] = std::vector{std::move(*one)};
    } else {
      parts[i] = one.error();
    }
  });
  std::vector<pipeline::PreparedContour> prepared;
  for (auto& part : parts) {
    if (!*part) return Error{part->error().code, drawing.name + ": " + part->error().message};
    for (pipeline::PreparedContour& one : **part) prepared.push_back(std::move(one));
  }
  pipeline::numberParts(prepared, static_cast<int>(drawing.contours.size()));
  return prepared;
}

std::string radiusText(double radius) {
  if (radius == 0.0) return "corner";
  return radius < kStraightFrom ? fmt::format("{:.3f}", radius) : "straight";
}

std::string counted(std::size_t n, std::string_view one) {
  return fmt::format("{} {}{}", n, one, n == 1 ? "" : "s");
}

}  // namespace kf::kfeed
