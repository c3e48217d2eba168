// How a long call is watched and stopped from another thread.
// Progress is a fraction, 0 to 1.
#pragma once

#include <atomic>

namespace kf {

// One object a run. The worker calls report() and asks isCancelled(); anyone may call cancel() and
// progress().
class RunControl {
 public:
  void cancel() { cancelled_.store(true, std::memory_order_relaxed); }
  bool isCancelled() const { return cancelled_.load(std::memory_order_relaxed); }
  void report(double fraction) { progress_.store(fraction, std::memory_order_relaxed); }
  double progress() const { return progress_.load(std::memory_order_relaxed); }

 private:
  std::atomic<bool> cancelled_{false};
  std::atomic<double> progress_{0.0};
};

}  // namespace kf
