// SHA-256 of bytes, for naming inputs and outputs.
// No units here.
#pragma once

#include <string>
#include <string_view>

namespace kf {

// 64 hexadecimal digits. Source: FIPS 180-4; tested on its example vectors.
std::string sha256Hex(std::string_view bytes);

}  // namespace kf
