// A static tree of boxes: which of many small things lie near a place.
// Lengths in mm.
#include "core/construct/box_tree.h"

#include <algorithm>
#include <numeric>

namespace kf::construct {

// Halves the boxes at the median of their centres along the longer side, so the depth is at most log2 n.
BoxTree::BoxTree(std::vector<curve::Box> boxes) : boxes_(std::move(boxes)), order_(boxes_.size()) {
  constexpr std::uint32_t kLeaf = 6;
  if (boxes_.empty()) return;
  std::iota(order_.begin(), order_.end(), 0u);
  nodes_.push_back({{}, 0, static_cast<std::uint32_t>(boxes_.size())});
  for (std::size_t at = 0; at < nodes_.size(); ++at) {
    const std::uint32_t first = nodes_[at].first, count = nodes_[at].count;
    curve::Box box, centres;
    for (std::uint32_t i = first; i < first + count; ++i) {
      const curve::Box& b = boxes_[order_[i]];
      box.include(b);
      centres.include(0.5 * (b.low + b.high));
    }
    nodes_[at].box = box;
    if (count <= kLeaf) continue;
    const bool alongX = centres.width() >= centres.height();
    const auto centre = [&](std::uint32_t i) {
      const curve::Box& b = boxes_[i];
      return alongX ? b.low.x + b.high.x : b.low.y + b.high.y;
    };
    const auto begin = order_.begin() + first;
    std::nth_element(begin, begin + count / 2, begin + count, [&](std::uint32_t a, std::uint32_t b) {
      const double ca = centre(a), cb = centre(b);
      return ca < cb || (ca == cb && a < b);
    });
    nodes_[at].count = 0;
    nodes_[at].first = static_cast<std::uint32_t>(nodes_.size());
    nodes_.push_back({{}, first, count / 2});
    nodes_.push_back({{}, first + count / 2, count - count / 2});
  }
}

}  // namespace kf::construct
