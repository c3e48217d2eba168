// The point list: rows sampled from a schedule, as CSV text.
// mm, s; feed in mm/min.
#include "core/write/point_list.h"

#include <algorithm>
#include <array>
#include <charconv>
#include <cmath>

#include <fmt/format.h>

namespace kf::write {
namespace {

using schedule::Schedule;
using schedule::State;

constexpr double kMostRows = 5e7;

// Shortest text that reads back as the same double, never with an exponent for sizes that occur here, never
// -0.
void appendFixed(std::string& out, double value, int digits) {
  std::array<char, 64> text{};
  const auto [end, failure] =
      std::to_chars(text.data(), text.data() + text.size(), value, std::chars_format::fixed, digits);
  std::string_view view(text.data(), static_cast<std::size_t>(end - text.data()));
  if (failure != std::errc()) view = "0";
  if (view.find('.') != std::string_view::npos) {
    while (view.back() == '0') view.remove_suffix(1);
    if (view.back() == '.') view.remove_suffix(1);
  }
  out += view == "-0" ? std::string_view("0") : view;
}

class Rows {
 public:
  Rows(std::string& out, const PointListContour& contour) : out_(out), contour_(contour) {}

  // Adds a row unless it does not come after the one before, in both s and t, by more than the digits written
  // can show.
  void add(const State& state, bool forced) {
    if (any_ && (state.t - lastT_ < 2e-10 || state.s - lastS_ < 2e-8)) {
      if (!forced) return;
      out_.resize(lastRow_);  // the end replaces a row that is too close to it
    }
    lastRow_ = out_.size();
    const PathPoint p = contour_.at(state.s);
    out_ += std::to_string(contour_.number);
    for (const auto& [value, digits] : {std::pair{state.s, 8},
                                        {state.t, 10},
                                        {p.x, 10},
                                        {p.y, 10},
                                        {state.v * 60.0, 6},
                                        {state.a, 4},
                                        {state.j, 2},
                                        {p.curvature, 9}}) {
      out_ += ',';
      appendFixed(out_, value, digits);
    }
    out_ += ',';
    out_ += toText(state.limitedBy);
    out_ += '\n';
    lastT_ = state.t;
    lastS_ = state.s;
    any_ = true;
  }

 private:
  std::string& out_;
  const PointListContour& contour_;
  std::size_t lastRow_ = 0;
  double lastT_ = 0.0, lastS_ = 0.0;
  bool any_ = false;
};

// Distance of `p` from the line through a and b; from a when they coincide.
double offChord(const PathPoint& a, const PathPoint& b, const PathPoint& p) {
  const double bx = b.x - a.x, by = b.y - a.y, px = p.x - a.x, py = p.y - a.y;
  const double n = std::hypot(bx, by);
  return n > 0.0 ? std::abs(bx * py - by * px) / n : std::hypot(px, py);
}

// Arc lengths of rows whose chords stay within `error`: halve a stride until five inner points agree.
std::vector<double> chordPlaces(const PointListContour& contour, double error, RunControl& control) {
  const double length = contour.schedule->length(), longest = length / 50.0;
  std::vector<double> places{0.0};
  std::vector<double> corners = contour.corners;
  corners.push_back(length);
  std::size_t corner = 0;
  double stride = longest;
  while (places.back() < length && static_cast<double>(places.size()) < kMostRows && !control.isCancelled()) {
    const double from = places.back();
    while (corners[corner] <= from) ++corner;
    stride = std::min({2.0 * stride, longest, corners[corner] - from});
    const PathPoint a = contour.at(from);
    for (;; stride *= 0.7) {
      const PathPoint b = contour.at(from + stride);
      double worst = 0.0;
      for (double part : {0.15, 0.35, 0.5, 0.65, 0.85})
        worst = std::max(worst, offChord(a, b, contour.at(from + part * stride)));
      if (worst <= 0.98 * error || stride < 1e-6) break;
    }
    const bool arrives = corners[corner] - from - stride <= 1e-9 * length;
    places.push_back(arrives ? corners[corner] : from + stride);
  }
  return places;
}

Result<void> addContour(std::string& out, const PointListContour& contour, Sampling sampling, double step,
                        RunControl& control) {
  const Schedule& schedule = *contour.schedule;
  Rows rows(out, contour);
  const double extent = sampling == Sampling::time ? schedule.time() : schedule.length();
  if (sampling != Sampling::chord && !(extent / step < kMostRows)) {
    return Error{ErrorCode::invalidArgument,
                 fmt::format("a step of {} asks for {:.3g} rows in contour {}; take a larger step", step,
                             extent / step, contour.number)};
  }
  std::size_t hint = 0;
  std::size_t n = 0;
  const auto watch = [&]() { return (++n & 1023U) != 0 || !control.isCancelled(); };
  if (sampling == Sampling::time) {
    for (std::size_t i = 0; static_cast<double>(i) * step < extent && watch(); ++i)
      rows.add(schedule.atTime(static_cast<double>(i) * step, hint), i == 0);
  } else if (sampling == Sampling::length) {
    for (std::size_t i = 0; static_cast<double>(i) * step < extent && watch(); ++i)
      rows.add(schedule.atLength(static_cast<double>(i) * step, hint), i == 0);
  } else {
    for (double s : chordPlaces(contour, step, control)) {
      if (s < extent && watch()) rows.add(schedule.atLength(s, hint), s == 0.0);
    }
  }
  if (control.isCancelled()) return Error{ErrorCode::cancelled, "cancelled"};
  rows.add(schedule.atTime(schedule.time(), hint), true);
  return {};
}

std::string_view unitOf(Sampling sampling) {
  switch (sampling) {
    case Sampling::chord:
      return "mm of chord error";
    case Sampling::time:
      return "s";
    case Sampling::length:
      break;
  }
  return "mm";
}

// One line of a comment: control characters would end it.
std::string oneLine(std::string text) {
  std::replace_if(
      text.begin(), text.end(), [](unsigned char c) { return c < 32 || c == 127; }, ' ');
  return text;
}

}  // namespace

Result<std::string> pointListText(const PointListHead& head, const std::vector<PointListContour>& contours,
                                  RunControl& control) {
  if (!std::isfinite(head.step) || !(head.step > 0.0)) {
    return Error{ErrorCode::invalidArgument,
                 fmt::format("the step must be a positive number, not {}", head.step)};
  }
  std::string out;
  out += fmt::format("# kappafeed {} point list, lengths in mm, times in s\n", head.version);
  out += fmt::format("# source: {} sha256 {}\n", oneLine(head.source), head.sourceSha256);
  out += fmt::format("# limits: {}\n", oneLine(head.limits));
  out +=
      fmt::format("# law: {}{}\n", head.law, head.law == "acceleration" ? " (jerk limits are not used)" : "");
  for (const std::string& value : head.limitValues) out += fmt::format("# limit {}\n", oneLine(value));
  for (const PointListContour& contour : contours) {
    out +=
        fmt::format("# contour {}: {}, {}, {} mm, {} s\n", contour.number, oneLine(contour.name),
                    contour.closed ? "closed" : "open", contour.schedule->length(), contour.schedule->time());
  }
  out += fmt::format("# sampled every {} {}\n", head.step, unitOf(head.sampling));
  out +=
      "# UNPROVEN: check the limits against the machine builder's data; guards closed; verify offsets and "
      "clearances;\n"
      "# dry run clear of the work, single block, low feed override, a hand at feed hold. Local law, the "
      "machine's manual\n"
      "# and qualified people come first.\n";
  out +=
      "contour,s_mm,t_s,x_mm,y_mm,feed_mm_per_min,acceleration_mm_per_s2,jerk_mm_per_s3,curvature_per_mm,"
      "limited_by\n";
  for (const PointListContour& contour : contours) {
    if (auto added = addContour(out, contour, head.sampling, head.step, control); !added)
      return added.error();
  }
  return out;
}

}  // namespace kf::write
