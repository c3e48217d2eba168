// The same work on many items, by several threads, with answers that do not depend on how many.
// No units here.
#pragma once

#include <algorithm>
#include <atomic>
#include <cstddef>
#include <thread>
#include <vector>

namespace kf {

// Calls work(i) once for each i below `count`, on up to `threads` threads (the caller's is one of them), and
// returns when all are done.
// Domain  work may not throw, and writes only what belongs to its own i.
template <class Work>
void forEachIndex(std::size_t count, int threads, const Work& work) {
  std::atomic<std::size_t> next{0};
  const auto run = [&] {
    for (std::size_t i = next++; i < count; i = next++) work(i);
  };
  std::vector<std::jthread> others;
  const std::size_t wanted = std::min(count, static_cast<std::size_t>(std::max(threads, 1)));
  for (std::size_t i = 1; i < wanted; ++i) others.emplace_back(run);
  run();
}

}  // namespace kf
