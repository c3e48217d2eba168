// What the machine, the control, the tool and the cut allow; read from and written to the limits file.
// Inside: mm, s, 1/s. Names that carry another unit say so.
#pragma once

#include <optional>
#include <string>
#include <string_view>
#include <vector>

#include "core/base/result.h"

namespace kf::limits {

// A missing value is no limit.
struct Axis {
  std::optional<double> speed;         // mm/s
  std::optional<double> acceleration;  // mm/s^2
  std::optional<double> jerk;          // mm/s^3

  friend bool operator==(const Axis&, const Axis&) = default;
};

enum class Side { on, left, right };

struct Limits {
  std::string name;
  bool example = false;  // an example, not anyone's machine: exports ask first

  Axis x, y;

  std::optional<double> feed;                     // mm/s, along the path
  std::optional<double> centripetalAcceleration;  // mm/s^2
  std::optional<double> tangentialAcceleration;   // mm/s^2
  std::optional<double> tangentialJerk;           // mm/s^3
  std::optional<double> normalJerk;               // mm/s^3, of steady motion through bends
  std::optional<double> lowerFeed;                // mm/s; slower cutting burns or rubs: told, never forced
  bool feedAtWall = false;                        // the feed holds at the wall, not at the tool's centre

  std::optional<double> pathTolerance;   // mm
  std::optional<double> chordTolerance;  // mm
  std::optional<double> blockPeriod;     // s
  std::optional<int> lookaheadBlocks;
  std::optional<double> positionGain;  // 1/s
  std::optional<double> velocityGain;  // 1/s, of the velocity loop inside the position loop
  std::optional<double> contourError;  // mm
  std::optional<double> blockLength;   // mm, of the shortest block that will be written

  std::optional<double> toolDiameter;  // mm
  Side side = Side::on;
  std::optional<int> teeth;
  std::optional<double> spindleRpm;     // 1/min
  std::optional<double> feedPerTooth;   // mm
  std::optional<double> radialDepth;    // mm
  std::optional<double> chipThickness;  // mm, the largest that a tooth may cut

  std::optional<double> rapidSpeed;         // mm/s, between contours; missing: the axes' own
  std::optional<double> rapidAcceleration;  // mm/s^2
  std::optional<double> plungeFeed;         // mm/s
  std::optional<double> plungeDepth;        // mm, from where the tool starts to plunge to the cutting depth
  std::optional<double> retractSpeed;       // mm/s; missing: the plunge feed
  std::optional<double> pierceTime;         // s, before each contour

  friend bool operator==(const Limits&, const Limits&) = default;
};

// One number of the file: its dotted name ("axes.X.speed_mm_per_min"), its unit as shown ("mm/min"), a short
// label of the trade ("X speed"), and access in the file's unit. The single table from which reading,
// writing, --set and the window's panel are made.
struct Field {
  std::string_view name;
  std::string_view unit;
  std::string_view label;
  std::string_view group;  // "axes", "path", "control", "tool", "moves"
  bool integer = false;
  std::optional<double> (*get)(const Limits&);
  void (*put)(Limits&, std::optional<double>);
};
const std::vector<Field>& fields();
const Field* findField(std::string_view dottedName);
// The names of fields(), "tool.side" and "path.feed_at".
std::vector<std::string_view> knownNames();

std::string_view toText(Side side);
std::optional<Side> sideFromText(std::string_view text);

// Fails  invalidArgument  `value` is not positive and finite, or not whole where the field counts.
Result<void> checkValue(const Field& field, double value);

// Fails  cannotRead  not JSON; wrong "format" or a newer "version"; an unknown key (the nearest known one is
// named);
//                    a value that is not a positive finite number or null. The message names `source` and the
//                    key.
Result<Limits> parseLimits(std::string_view json, std::string_view source);
// "-" is standard input.
// Fails  cannotRead  the file can't be opened, is larger than 1 MiB, or parseLimits refuses it.
Result<Limits> readLimitsFile(const std::string& path);
// The file's text; reading it back gives an equal value.
std::string toJson(const Limits& limits);

// Sets one value by "NAME=VALUE" as --set does; VALUE "null" or "none" removes the limit, tool.side takes
// on|left|right, path.feed_at centre|wall. Fails  invalidArgument  unknown name (the nearest is named), or a
// value outside its domain.
Result<void> set(Limits& limits, std::string_view assignment);

// Whether a plan can be made. Fails  invalidArgument  the feed is missing, or an axis lacks speed and
// acceleration.
Result<void> validateForPlan(const Limits& limits);

}  // namespace kf::limits
