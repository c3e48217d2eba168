// The layers of a DXF drawing.
// No units here.
#include "core/read/dxf_layers.h"

#include <algorithm>

#include "core/read/text.h"

namespace kf::read {

std::size_t LayerTable::indexOf(std::string_view bytes, std::string_view codePage) {
  if (!layers_.empty() && bytes == lastBytes_) return last_;
  auto known = byBytes_.find(bytes);
  if (known == byBytes_.end()) {
    const std::string name = decoded(bytes, codePage);
    const auto [entry, isNew] = byName_.try_emplace(lowerCase(name), layers_.size());
    if (isNew) {
      Layer layer;
      layer.name = name;
      layer.chosen = std::any_of(chosen_.begin(), chosen_.end(), [&](const std::string& wanted) {
        return lowerCase(wanted) == entry->first;
      });
      layers_.push_back(std::move(layer));
    }
    known = byBytes_.emplace(std::string(bytes), entry->second).first;
  }
  lastBytes_ = bytes;
  return last_ = known->second;
}

std::string_view LayerTable::whyHidden(std::size_t i) const {
  const Layer& layer = layers_[i];
  if (layer.chosen) return "";
  return layer.frozen ? "its layer is frozen" : layer.off ? "its layer is off" : "";
}

std::string_view LayerTable::whyNotWanted(std::size_t i) const {
  return chosen_.empty() || layers_[i].chosen ? "" : "its layer was not chosen";
}

}  // namespace kf::read
