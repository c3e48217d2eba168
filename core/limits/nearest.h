// The known word nearest to a mistyped one.
// No units here.
#pragma once

#include <string>
#include <string_view>
#include <vector>

namespace kf::limits {

// By edit distance in which adding a character is cheaper than changing or dropping one; the first of equals;
// empty when `known` is.
std::string nearest(std::string_view word, const std::vector<std::string_view>& known);

}  // namespace kf::limits
