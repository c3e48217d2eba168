// A static tree of boxes: which of many small things lie near a place.
// Lengths in mm.
#pragma once

#include <cstddef>
#include <cstdint>
#include <vector>

#include "core/curve/vec2.h"

namespace kf::construct {

// Cost  building O(n log n); a visit O(log n + found) for things of like size.
class BoxTree {
 public:
  explicit BoxTree(std::vector<curve::Box> boxes);

  // Calls see(index) for each box that meets `area` until it returns false. Returns false when stopped.
  template <class See>
  bool visit(const curve::Box& area, const See& see) const {
    if (nodes_.empty()) return true;
    std::uint32_t stack[64];
    int top = 0;
    stack[top++] = 0;
    while (top > 0) {
      const Node& node = nodes_[stack[--top]];
      if (!meets(node.box, area)) continue;
      if (node.count > 0) {
        for (std::uint32_t i = node.first; i < node.first + node.count; ++i) {
          if (meets(boxes_[order_[i]], area) && !see(static_cast<std::size_t>(order_[i]))) return false;
        }
      } else {
        stack[top++] = node.first;
        stack[top++] = node.first + 1;
      }
    }
    return true;
  }

  static bool meets(const curve::Box& a, const curve::Box& b) {
    return a.low.x <= b.high.x && b.low.x <= a.high.x && a.low.y <= b.high.y && b.low.y <= a.high.y;
  }

 private:
  // A leaf when count > 0: boxes order_[first .. first+count). Otherwise its children are first and first
  // + 1.
  struct Node {
    curve::Box box;
    std::uint32_t first = 0, count = 0;
  };
  std::vector<curve::Box> boxes_;
  std::vector<std::uint32_t> order_;
  std::vector<Node> nodes_;
};

}  // namespace kf::construct
