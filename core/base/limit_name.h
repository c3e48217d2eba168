// The names of what can limit the speed at a place. They appear in files: never rename one.
// No units here.
#pragma once

#include <array>
#include <cstddef>
#include <cstdint>
#include <optional>
#include <string_view>

namespace kf {

enum class LimitName : std::uint8_t {
  feed,
  axisSpeedX,
  axisSpeedY,
  centripetal,
  chord,
  blockPeriod,
  contourError,
  chipLoad,
  axisAccelerationX,
  axisAccelerationY,
  tangentialAcceleration,
  axisJerkX,
  axisJerkY,
  tangentialJerk,
  joint,
  stop,
  normalJerk,
};

inline constexpr std::size_t kLimitNameCount = 17;

// All names, in the order of the enumeration.
std::array<LimitName, kLimitNameCount> allLimitNames();

// The name as files write it, for example "axis-acceleration-x".
std::string_view toText(LimitName name);

// The inverse of toText; empty when `text` is none of the names.
std::optional<LimitName> limitNameFromText(std::string_view text);

}  // namespace kf
