// The table of every number in the limits file, and assignment by dotted name.
// Access is in the file's units: mm/min, mm/s^2, mm/s^3, mm, ms, 1/s, 1/min.
#include <algorithm>
#include <array>
#include <charconv>
#include <cmath>

#include <fmt/format.h>

#include "core/limits/limits.h"
#include "core/limits/nearest.h"

namespace kf::limits {
namespace {

using Number = std::optional<double>;

// The stored number in the file's unit, without the digits that only rounding adds: 18000, not
// 17999.999999999996.
double inFileUnit(double stored, int numerator, int denominator) {
  const double value = stored * numerator / denominator;
  std::array<char, 32> text{};
  const auto [end, failure] =
      std::to_chars(text.data(), text.data() + text.size(), value, std::chars_format::scientific, 14);
  double tidy = value;
  if (failure == std::errc()) std::from_chars(text.data(), end, tidy);
  return tidy * denominator / numerator == stored ? tidy : value;
}

// Access to a member that is stored in another unit than the file's.
template <auto Member, int Numerator = 1, int Denominator = 1>
Number getTop(const Limits& l) {
  const auto& value = l.*Member;
  if (!value) return std::nullopt;
  return inFileUnit(static_cast<double>(*value), Numerator, Denominator);
}

template <auto Member, int Numerator = 1, int Denominator = 1>
void putTop(Limits& l, Number value) {
  auto& target = l.*Member;
  using Stored = typename std::remove_reference_t<decltype(target)>::value_type;
  if (!value) {
    target.reset();
  } else {
    target = static_cast<Stored>(*value * Denominator / Numerator);
  }
}

template <auto AxisMember, auto Member, int Numerator = 1>
Number getAxis(const Limits& l) {
  const auto& value = l.*AxisMember.*Member;
  return value ? Number(inFileUnit(*value, Numerator, 1)) : std::nullopt;
}

template <auto AxisMember, auto Member, int Numerator = 1>
void putAxis(Limits& l, Number value) {
  (l.*AxisMember).*Member = value ? Number(*value / Numerator) : std::nullopt;
}

template <auto AxisMember>
void addAxis(std::vector<Field>& list, const std::array<std::string_view, 6>& text) {
  list.push_back({text[0], "mm/min", text[1], "axes", false, getAxis<AxisMember, &Axis::speed, 60>,
                  putAxis<AxisMember, &Axis::speed, 60>});
  list.push_back({text[2], "mm/s^2", text[3], "axes", false, getAxis<AxisMember, &Axis::acceleration>,
                  putAxis<AxisMember, &Axis::acceleration>});
  list.push_back({text[4], "mm/s^3", text[5], "axes", false, getAxis<AxisMember, &Axis::jerk>,
                  putAxis<AxisMember, &Axis::jerk>});
}

std::vector<Field> makeFields() {
  std::vector<Field> f;
  addAxis<&Limits::x>(f, {"axes.X.speed_mm_per_min", "X speed", "axes.X.acceleration_mm_per_s2",
                          "X acceleration", "axes.X.jerk_mm_per_s3", "X jerk"});
  addAxis<&Limits::y>(f, {"axes.Y.speed_mm_per_min", "Y speed", "axes.Y.acceleration_mm_per_s2",
                          "Y acceleration", "axes.Y.jerk_mm_per_s3", "Y jerk"});
  f.push_back({"path.feed_mm_per_min", "mm/min", "Feed", "path", false, getTop<&Limits::feed, 60>,
               putTop<&Limits::feed, 60>});
  f.push_back({"path.centripetal_acceleration_mm_per_s2", "mm/s^2", "Centripetal acceleration", "path", false,
               getTop<&Limits::centripetalAcceleration>, putTop<&Limits::centripetalAcceleration>});
  f.push_back({"path.tangential_acceleration_mm_per_s2", "mm/s^2", "Tangential acceleration", "path", false,
               getTop<&Limits::tangentialAcceleration>, putTop<&Limits::tangentialAcceleration>});
  f.push_back({"path.tangential_jerk_mm_per_s3", "mm/s^3", "Tangential jerk", "path", false,
               getTop<&Limits::tangentialJerk>, putTop<&Limits::tangentialJerk>});
  f.push_back({"path.normal_jerk_mm_per_s3", "mm/s^3", "Normal jerk", "path", false,
               getTop<&Limits::normalJerk>, putTop<&Limits::normalJerk>});
  f.push_back({"path.lower_feed_mm_per_min", "mm/min", "Lowest feed", "path", false,
               getTop<&Limits::lowerFeed, 60>, putTop<&Limits::lowerFeed, 60>});
  f.push_back({"control.path_tolerance_mm", "mm", "Path tolerance", "control", false,
               getTop<&Limits::pathTolerance>, putTop<&Limits::pathTolerance>});
  f.push_back({"control.chord_tolerance_mm", "mm", "Chord tolerance", "control", false,
               getTop<&Limits::chordTolerance>, putTop<&Limits::chordTolerance>});
  f.push_back({"control.block_period_ms", "ms", "Block period", "control", false,
               getTop<&Limits::blockPeriod, 1000>, putTop<&Limits::blockPeriod, 1000>});
  f.push_back({"control.lookahead_blocks", "", "Lookahead blocks", "control", true,
               getTop<&Limits::lookaheadBlocks>, putTop<&Limits::lookaheadBlocks>});
  f.push_back({"control.position_gain_per_s", "1/s", "Position gain", "control", false,
               getTop<&Limits::positionGain>, putTop<&Limits::positionGain>});
  f.push_back({"control.velocity_gain_per_s", "1/s", "Velocity loop gain", "control", false,
               getTop<&Limits::velocityGain>, putTop<&Limits::velocityGain>});
  f.push_back({"control.contour_error_mm", "mm", "Contour error", "control", false,
               getTop<&Limits::contourError>, putTop<&Limits::contourError>});
  f.push_back({"control.block_length_mm", "mm", "Shortest block", "control", false,
               getTop<&Limits::blockLength>, putTop<&Limits::blockLength>});
  f.push_back({"tool.diameter_mm", "mm", "Tool diameter", "tool", false, getTop<&Limits::toolDiameter>,
               putTop<&Limits::toolDiameter>});
  f.push_back({"tool.teeth", "", "Teeth", "tool", true, getTop<&Limits::teeth>, putTop<&Limits::teeth>});
  f.push_back({"tool.spindle_rpm", "1/min", "Spindle speed", "tool", false, getTop<&Limits::spindleRpm>,
               putTop<&Limits::spindleRpm>});
  f.push_back({"tool.feed_per_tooth_mm", "mm", "Feed per tooth", "tool", false, getTop<&Limits::feedPerTooth>,
               putTop<&Limits::feedPerTooth>});
  f.push_back({"tool.radial_depth_mm", "mm", "Radial depth", "tool", false, getTop<&Limits::radialDepth>,
               putTop<&Limits::radialDepth>});
  f.push_back({"tool.chip_thickness_mm", "mm", "Chip thickness", "tool", false,
               getTop<&Limits::chipThickness>, putTop<&Limits::chipThickness>});
  f.push_back({"moves.rapid_speed_mm_per_min", "mm/min", "Rapid speed", "moves", false,
               getTop<&Limits::rapidSpeed, 60>, putTop<&Limits::rapidSpeed, 60>});
  f.push_back({"moves.rapid_acceleration_mm_per_s2", "mm/s^2", "Rapid acceleration", "moves", false,
               getTop<&Limits::rapidAcceleration>, putTop<&Limits::rapidAcceleration>});
  f.push_back({"moves.plunge_feed_mm_per_min", "mm/min", "Plunge feed", "moves", false,
               getTop<&Limits::plungeFeed, 60>, putTop<&Limits::plungeFeed, 60>});
  f.push_back({"moves.plunge_depth_mm", "mm", "Plunge depth", "moves", false, getTop<&Limits::plungeDepth>,
               putTop<&Limits::plungeDepth>});
  f.push_back({"moves.retract_speed_mm_per_min", "mm/min", "Retract speed", "moves", false,
               getTop<&Limits::retractSpeed, 60>, putTop<&Limits::retractSpeed, 60>});
  f.push_back({"moves.pierce_time_s", "s", "Pierce time", "moves", false, getTop<&Limits::pierceTime>,
               putTop<&Limits::pierceTime>});
  return f;
}

Error invalid(std::string message) {
  return {ErrorCode::invalidArgument, std::move(message)};
}

}  // namespace

const std::vector<Field>& fields() {
  static const std::vector<Field> table = makeFields();
  return table;
}

const Field* findField(std::string_view dottedName) {
  const auto& table = fields();
  const auto found =
      std::find_if(table.begin(), table.end(), [dottedName](const Field& f) { return f.name == dottedName; });
  return found == table.end() ? nullptr : &*found;
}

std::string_view toText(Side side) {
  return side == Side::left ? "left" : side == Side::right ? "right" : "on";
}

std::optional<Side> sideFromText(std::string_view text) {
  for (Side side : {Side::on, Side::left, Side::right}) {
    if (toText(side) == text) return side;
  }
  return std::nullopt;
}

Result<void> checkValue(const Field& field, double value) {
  if (!std::isfinite(value) || !(value > 0.0)) {
    return invalid(fmt::format(
        "{} must be a positive number, not {}; leave it out or write null for no limit", field.name, value));
  }
  if (field.integer && (value != std::floor(value) || value > 1e9)) {
    return invalid(fmt::format("{} must be a whole number up to 1e9, not {}", field.name, value));
  }
  return {};
}

std::vector<std::string_view> knownNames() {
  std::vector<std::string_view> names;
  for (const Field& field : fields()) names.push_back(field.name);
  names.push_back("tool.side");
  names.push_back("path.feed_at");
  return names;
}

Result<void> set(Limits& limits, std::string_view assignment) {
  const std::size_t equals = assignment.find('=');
  if (equals == std::string_view::npos) {
    return invalid(fmt::format("'{}' is not NAME=VALUE; for example path.feed_mm_per_min=3000", assignment));
  }
  const std::string_view name = assignment.substr(0, equals), text = assignment.substr(equals + 1);
  if (name == "tool.side") {
    const auto side = sideFromText(text);
    if (!side) return invalid(fmt::format("tool.side must be on, left or right, not '{}'", text));
    limits.side = *side;
    return {};
  }
  if (name == "path.feed_at") {
    if (text != "wall" && text != "centre")
      return invalid(fmt::format("path.feed_at must be centre or wall, not '{}'", text));
    limits.feedAtWall = text == "wall";
    return {};
  }
  const Field* field = findField(name);
  if (field == nullptr) {
    return invalid(
        fmt::format("there is no limit named '{}'; the nearest is {}", name, nearest(name, knownNames())));
  }
  if (text == "null" || text == "none") {
    field->put(limits, std::nullopt);
    return {};
  }
  double value = 0.0;
  const auto [end, failure] = std::from_chars(text.data(), text.data() + text.size(), value);
  if (failure != std::errc() || end != text.data() + text.size()) {
    return invalid(fmt::format("{} needs a number with a decimal point, or none, not '{}'", name, text));
  }
  if (auto checked = checkValue(*field, value); !checked) return checked;
  field->put(limits, value);
  return {};
}

Result<void> validateForPlan(const Limits& limits) {
  const auto need = [&limits](std::string_view name) -> Result<void> {
    if (findField(name)->get(limits)) return {};
    return invalid(
        fmt::format("a plan needs {}; add it to the limits file or use --set {}=VALUE", name, name));
  };
  for (std::string_view name :
       {"path.feed_mm_per_min", "axes.X.speed_mm_per_min", "axes.X.acceleration_mm_per_s2",
        "axes.Y.speed_mm_per_min", "axes.Y.acceleration_mm_per_s2"}) {
    if (auto there = need(name); !there) return there;
  }
  return {};
}

}  // namespace kf::limits
