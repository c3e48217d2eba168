// Sharing the length of each segment between the blends at its two ends.
// Lengths in mm.
#include "core/construct/shares.h"

#include <algorithm>
#include <functional>
#include <queue>
#include <utility>

namespace kf::construct {
namespace {

constexpr std::size_t kNone = static_cast<std::size_t>(-1);

class Filling {
 public:
  Filling(const std::vector<double>& lengths, const std::vector<double>& wanted, bool closed)
      : lengths_(lengths), wanted_(wanted), closed_(closed), shares_(wanted.size(), -1.0) {
    if (!closed_) shares_.back() = 0.0;
    for (std::size_t i = 0; i < lengths_.size(); ++i) push(i);
  }

  std::vector<double> run() {
    while (!queue_.empty() && queue_.top().first < 1.0) {
      const auto [level, segment] = queue_.top();
      queue_.pop();
      // An entry made before a neighbour froze is too low: its place in the queue is renewed.
      const double now = levelOf(segment);
      if (now > level) {
        if (now < 1.0) queue_.emplace(now, segment);
        continue;
      }
      freeze(startJoint(segment), level);
      freeze(segment, level);
    }
    for (std::size_t j = 0; j < shares_.size(); ++j) {
      if (shares_[j] < 0.0) shares_[j] = wanted_[j];
    }
    return std::move(shares_);
  }

 private:
  std::size_t startJoint(std::size_t segment) const {
    if (segment > 0) return segment - 1;
    return closed_ ? lengths_.size() - 1 : kNone;
  }

  // The common fraction at which this segment is full; 1 or more when it never is.
  double levelOf(std::size_t segment) const {
    double left = lengths_[segment], rate = 0.0;
    for (std::size_t joint : {startJoint(segment), segment}) {
      if (joint == kNone) continue;
      if (shares_[joint] >= 0.0)
        left -= shares_[joint];
      else
        rate += wanted_[joint];
    }
    return rate > 0.0 ? std::max(left, 0.0) / rate : 2.0;
  }

  void push(std::size_t segment) {
    const double level = levelOf(segment);
    if (level < 1.0) queue_.emplace(level, segment);
  }

  void freeze(std::size_t joint, double level) {
    if (joint != kNone && shares_[joint] < 0.0) shares_[joint] = level * wanted_[joint];
  }

  using Entry = std::pair<double, std::size_t>;
  const std::vector<double>& lengths_;
  const std::vector<double>& wanted_;
  bool closed_;
  std::vector<double> shares_;  // negative: still rising
  std::priority_queue<Entry, std::vector<Entry>, std::greater<>> queue_;
};

}  // namespace

std::vector<double> fairShares(const std::vector<double>& lengths, const std::vector<double>& wanted,
                               bool closed) {
  if (lengths.empty()) return {};
  return Filling(lengths, wanted, closed).run();
}

}  // namespace kf::construct
