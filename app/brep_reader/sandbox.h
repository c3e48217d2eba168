// What the helper gives up before it looks at a file.
// Times in s, sizes in bytes.
#pragma once

#include <cstddef>

namespace kf::brep {

struct Sandbox {
  unsigned cpuSeconds = 60;
  std::size_t memoryBytes = std::size_t{2} << 30U;
};

// Limits on memory, processor time, files and core dumps; death with the parent; no new rights; and, where
// the kernel lets us, system calls for network, other programs and other processes fail with EPERM. False
// when one of the limits could not be set.
bool enterSandbox(const Sandbox& sandbox);

}  // namespace kf::brep
