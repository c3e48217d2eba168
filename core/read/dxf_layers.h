// The layers of a DXF drawing: names told apart as the format does, and which are shown; internal to read.
// No units here.
#pragma once

#include <map>
#include <string>
#include <string_view>
#include <vector>

namespace kf::read {

struct Layer {
  std::string name;  // UTF-8, as first met
  bool frozen = false, off = false;
  bool chosen = false;  // by the user
  bool used = false;    // carries a curve of the drawing
};

// Names differ by more than the case of ASCII letters. Layer 0 always exists and has index 0.
class LayerTable {
 public:
  explicit LayerTable(const std::vector<std::string>& chosen) : chosen_(chosen) { indexOf("0", ""); }

  // The layer of that name, made on first sight.
  std::size_t indexOf(std::string_view bytes, std::string_view codePage);
  Layer& operator[](std::size_t i) { return layers_[i]; }

  // Why entities on it are left out; empty when they are read. A layer that the user chose is read even when
  // it is off or frozen.
  std::string_view whyHidden(std::size_t i) const;
  std::string_view whyNotWanted(std::size_t i) const;

 private:
  const std::vector<std::string>& chosen_;
  std::vector<Layer> layers_;
  std::map<std::string, std::size_t, std::less<>> byBytes_, byName_;
  std::string lastBytes_;
  std::size_t last_ = 0;
};

}  // namespace kf::read
