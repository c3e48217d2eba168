// Names of limits as text.
// No units here.
#include "core/base/limit_name.h"

namespace kf {
namespace {

constexpr std::array<std::string_view, kLimitNameCount> kTexts = {"feed",
                                                                  "axis-speed-x",
                                                                  "axis-speed-y",
                                                                  "centripetal",
                                                                  "chord",
                                                                  "block-period",
                                                                  "contour-error",
                                                                  "chip-load",
                                                                  "axis-acceleration-x",
                                                                  "axis-acceleration-y",
                                                                  "tangential-acceleration",
                                                                  "axis-jerk-x",
                                                                  "axis-jerk-y",
                                                                  "tangential-jerk",
                                                                  "joint",
                                                                  "stop",
                                                                  "normal-jerk"};

}  // namespace

std::array<LimitName, kLimitNameCount> allLimitNames() {
  std::array<LimitName, kLimitNameCount> names{};
  for (std::size_t i = 0; i < kLimitNameCount; ++i) names[i] = static_cast<LimitName>(i);
  return names;
}

std::string_view toText(LimitName name) {
  return kTexts[static_cast<std::size_t>(name)];
}

std::optional<LimitName> limitNameFromText(std::string_view text) {
  for (LimitName name : allLimitNames()) {
    if (toText(name) == text) return name;
  }
  return std::nullopt;
}

}  // namespace kf
