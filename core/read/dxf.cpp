// DXF, text and binary: sections, layers, blocks and their expansion.
// Lengths in drawing units.
#include <algorithm>
#include <cmath>
#include <map>
#include <string>

#include <fmt/format.h>

#include "core/read/dxf_entities.h"
#include "core/read/dxf_header.h"
#include "core/read/dxf_layers.h"
#include "core/read/text.h"

namespace kf::read {
namespace {

using curve::Affine2;
using curve::Vec2;

constexpr int kDeepestBlock = 32;
// Coordinates beyond this can't be told apart to 1e-4 any more.
constexpr double kLargestCoordinate = 1e12;

// An entity as read, before blocks are expanded.
struct Item {
  std::string type;
  std::size_t layer = 0;
  std::size_t at = 0;  // line or byte of its group 0
  EntityContent content;
};

struct Block {
  Vec2 base;
  std::vector<Item> items;
  bool isOutside = false;  // its content lives in another file
};

// Collects the vertices that follow an old-style POLYLINE.
struct OpenPolyline {
  Item item;
  std::vector<BulgeVertex> vertices;
  std::vector<double> heights;
  Affine2 map;
  bool closed = false, spatial = false;
};

bool within(Vec2 p) {
  return std::abs(p.x) <= kLargestCoordinate && std::abs(p.y) <= kLargestCoordinate;
}

// False when a number of the curve is not finite or too large, or when the curve has shrunk to nothing.
bool isUsable(const curve::Curve& c) {
  if (const curve::Line* line = c.asLine()) return within(line->a) && within(line->b);
  if (const curve::Arc* arc = c.asArc())
    return within(arc->centre) && arc->radius > 0.0 && arc->radius <= kLargestCoordinate &&
           std::isfinite(arc->sweep);
  if (const curve::EllipticArc* arc = c.asEllipticArc()) {
    return within(arc->centre) && within(arc->u) && within(arc->v) && curve::cross(arc->u, arc->v) != 0.0 &&
           std::isfinite(arc->sweep);
  }
  const auto& poles = c.asNurbs()->poles;
  return std::all_of(poles.begin(), poles.end(), within);
}

class DxfReader {
 public:
  DxfReader(std::string_view bytes, std::string_view name, const ReadOptions& options, RunControl& control)
      : stream_(bytes, name),
        name_(name),
        options_(options),
        control_(control),
        layers_(options.layers),
        isBinary_(isBinaryDxf(bytes)) {}

  Result<Drawing> run() {
    drawing_.format = isBinary_ ? "binary DXF" : "DXF";
    for (;;) {
      auto more = nextRecord();
      if (!more) return more.error();
      if (!*more)
        return damaged(
            fmt::format("ends at {} without EOF; the file is cut short, get a whole copy", stream_.place()));
      if (record_.type == "EOF") break;
      if (auto taken = take(); !taken) return taken.error();
    }
    if (!section_.empty()) return damagedHere("EOF inside section " + section_);
    if (!sawEntities_) return damaged("has no ENTITIES section; the file is damaged or holds no drawing");
    if (auto done = expandAll(); !done) return done.error();
    return std::move(drawing_);
  }

 private:
  Error damaged(std::string_view what) const {
    return {ErrorCode::cannotRead, fmt::format("{} {}", name_, what)};
  }
  Error damagedHere(std::string_view what) const {
    return damaged(fmt::format("{}: {}; the file is damaged, get a whole copy", record_.place(), what));
  }
  std::string placeOf(const Item& item) const {
    return fmt::format("{} {}", isBinary_ ? "byte" : "line", item.at);
  }

  // Gathers the groups up to the next group 0. HEADER variables arrive as one record whose type is SECTION.
  Result<bool> nextRecord() {
    if (!hasPending_) {
      auto first = stream_.next(pending_);
      if (!first || !*first) return first;
      if (pending_.code != 0) {
        return damaged(fmt::format("{}: begins with group {} instead of 0; it is not a DXF file",
                                   pending_.place(), pending_.code));
      }
    }
    record_.head = pending_;
    record_.type = trimmed(pending_.value);
    record_.groups.clear();
    for (;;) {
      auto more = stream_.next(pending_);
      if (!more) return more;
      hasPending_ = *more && pending_.code == 0;
      if (!*more || hasPending_) return true;
      record_.groups.push_back(pending_);
    }
  }

  Result<void> take() {
    if ((++records_ & 1023U) == 0) {
      if (control_.isCancelled()) return Error{ErrorCode::cancelled, "cancelled"};
      control_.report(0.9 * stream_.progress());
    }
    if (record_.type == "SECTION") return beginSection();
    if (record_.type == "ENDSEC") {
      if (section_.empty()) return damagedHere("ENDSEC without SECTION");
      if (polyline_ || block_ != nullptr)
        return damagedHere(
            fmt::format("section {} ends inside a {}", section_, polyline_ ? "POLYLINE" : "BLOCK"));
      section_.clear();
      return {};
    }
    if (section_.empty()) return damagedHere(toUtf8(record_.type.substr(0, 40)) + " outside any section");
    if (section_ == "TABLES") return tableEntry();
    if (section_ == "BLOCKS") return blockEntry();
    if (section_ == "ENTITIES") return entity(entities_);
    return {};
  }

  Result<void> beginSection() {
    if (!section_.empty()) return damagedHere("SECTION inside section " + section_);
    const Group* name = record_.find(2);
    if (name == nullptr) return damagedHere("a SECTION without a name");
    section_ = toUtf8(trimmed(name->value).substr(0, 40));
    if (section_ == "ENTITIES") sawEntities_ = true;
    if (section_ != "HEADER") return {};
    auto header = readHeader(record_, name_);
    if (!header) return header.error();
    drawing_.millimetresPerUnit = header->millimetresPerUnit;
    drawing_.unitName = header->unitName;
    codePage_ = header->codePage;
    return {};
  }

  Result<void> tableEntry() {
    if (record_.type != "LAYER" || record_.find(2) == nullptr) return {};
    Fields f(record_, name_);
    Layer& layer = layers_[layers_.indexOf(record_.find(2)->value, codePage_)];
    layer.frozen = (f.whole(70) & 1) != 0;
    layer.off = f.whole(62, 7) < 0;
    return f.failed() ? Result<void>(*f.failed()) : Result<void>();
  }

  Result<void> blockEntry() {
    if (record_.type == "BLOCK") {
      if (block_ != nullptr || polyline_) return damagedHere("a BLOCK inside a " + openThing());
      const Group* name = record_.find(2);
      if (name == nullptr) return damagedHere("a BLOCK without a name");
      Fields f(record_, name_);
      Block block{f.point(10), {}, (f.whole(70) & 4) != 0};
      if (f.failed()) return *f.failed();
      block_ = &blocks_[lowerCase(name->value)];
      *block_ = std::move(block);
      return {};
    }
    if (record_.type == "ENDBLK") {
      if (polyline_) return damagedHere("ENDBLK inside a POLYLINE");
      block_ = nullptr;
      return {};
    }
    if (block_ == nullptr) return {};
    return entity(block_->items);
  }

  std::string openThing() const { return polyline_ ? "POLYLINE" : "BLOCK"; }

  Result<void> entity(std::vector<Item>& target) {
    if (polyline_) return polylinePart(target);
    if (record_.type == "SEQEND" || record_.type == "VERTEX") return {};  // after attributes of an INSERT
    Item item;
    item.type = toUtf8(record_.type.substr(0, 60));
    item.at = record_.head.at;
    const Group* layer = record_.find(8);
    item.layer = layer == nullptr ? 0 : layers_.indexOf(layer->value, codePage_);
    Fields f(record_, name_);
    if (f.whole(67) == 1) item.content.ignoreReason = "it stands on the paper sheet, not in the drawing";
    if (f.whole(60) == 1) item.content.ignoreReason = "it is invisible";
    if (record_.type == "POLYLINE") {
      beginPolyline(std::move(item), f);
      return f.failed() ? Result<void>(*f.failed()) : Result<void>();
    }
    if (f.failed()) return *f.failed();
    if (item.content.ignoreReason.empty()) {
      auto content = interpret(record_, options_.hatchBoundaries, name_);
      if (!content) return content.error();
      item.content = std::move(*content);
    }
    target.push_back(std::move(item));
    return {};
  }

  void beginPolyline(Item item, Fields& f) {
    const auto flags = f.whole(70);
    OpenPolyline open;
    open.closed = (flags & 1) != 0;
    open.spatial = (flags & 8) != 0;  // in world coordinates
    const auto map = objectMap(f);
    if (!open.spatial) open.map = map.value_or(Affine2{});
    if (!open.spatial && !map) item.content.skipReason = "it is not parallel to the XY plane";
    if ((flags & (16 | 64)) != 0) item.content.skipReason = "a mesh has no contour";
    open.item = std::move(item);
    polyline_ = std::move(open);
  }

  Result<void> polylinePart(std::vector<Item>& target) {
    if (record_.type == "VERTEX") {
      Fields f(record_, name_);
      const BulgeVertex vertex{f.point(10), f.real(42)};
      const double height = f.real(30);
      const auto flags = f.whole(70);
      if (f.failed()) return *f.failed();
      if ((flags & 16) != 0) return {};  // a control point of a fitted curve, not on it
      polyline_->vertices.push_back(vertex);
      polyline_->heights.push_back(height);
      return {};
    }
    if (record_.type != "SEQEND")
      return damagedHere(toUtf8(record_.type.substr(0, 40)) + " inside a POLYLINE that has no SEQEND");
    Item item = std::move(polyline_->item);
    if (item.content.skipReason.empty() && item.content.ignoreReason.empty()) finishPolyline(item);
    polyline_.reset();
    target.push_back(std::move(item));
    return {};
  }

  void finishPolyline(Item& item) const {
    const auto& heights = polyline_->heights;
    if (polyline_->spatial && !heights.empty()) {
      const auto [low, high] = std::minmax_element(heights.begin(), heights.end());
      if (!sameLevel(*low, *high, std::abs(*high))) {
        item.content.skipReason = "it leaves the XY plane";
        return;
      }
    }
    for (const curve::Curve& piece : polylineCurves(polyline_->vertices, polyline_->closed))
      item.content.curves.push_back(piece.transformed(polyline_->map));
    if (item.content.curves.empty()) item.content.skipReason = "it has fewer than two different vertices";
  }

  // Each step of expanding blocks counts, also those that draw nothing, so that no nesting runs for hours.
  Result<void> countStep() {
    if ((++steps_ & 4095U) == 0) {
      if (control_.isCancelled()) return Error{ErrorCode::cancelled, "cancelled"};
      control_.report(0.9 + 0.1 * static_cast<double>(drawing_.curves.size()) /
                                static_cast<double>(options_.maxCurves));
    }
    return steps_ > 4 * options_.maxCurves ? Result<void>(tooMany()) : Result<void>();
  }

  // What the drawing itself holds is not needed afterwards: its curves move.
  Result<void> expandAll() {
    std::size_t curves = 0;
    for (const Item& item : entities_) curves += item.content.curves.size();
    drawing_.curves.reserve(std::min(curves, options_.maxCurves));
    return expand(entities_, nullptr, 0, 0);
  }

  // Copies items into the drawing, blocks expanded; `map` is null outside blocks. Layer 0 in a block stands
  // for the layer of its insert.
  Result<void> expand(std::vector<Item>& items, const Affine2* map, std::size_t insertLayer, int depth) {
    for (Item& item : items) {
      if (auto counted = countStep(); !counted) return counted;
      const std::size_t layer = item.layer == 0 && depth > 0 ? insertLayer : item.layer;
      if (!item.content.ignoreReason.empty()) {
        note(drawing_.ignored, item.type, item.content.ignoreReason, placeOf(item));
        continue;
      }
      // What a block holds on layers that are on is shown even when its insert's layer is off, though not
      // when that is frozen.
      const bool passesThrough = item.content.insert && !layers_[layer].frozen;
      if (const auto why = layers_.whyHidden(layer); !why.empty() && !passesThrough) {
        note(drawing_.ignored, item.type, why, placeOf(item));
        continue;
      }
      if (!item.content.insert) {
        if (const auto why = layers_.whyNotWanted(layer); !why.empty()) {
          note(drawing_.ignored, item.type, why, placeOf(item));
          continue;
        }
      }
      if (!item.content.skipReason.empty()) {
        note(drawing_.skipped, item.type, item.content.skipReason, placeOf(item));
        continue;
      }
      auto added = item.content.insert ? insert(item, map, layer, depth) : addCurves(item, map, layer);
      if (!added) return added;
    }
    return {};
  }

  Result<void> addCurves(Item& item, const Affine2* map, std::size_t layerIndex) {
    Layer& layer = layers_[layerIndex];
    if (drawing_.curves.size() + item.content.curves.size() > options_.maxCurves) return tooMany();
    const std::size_t before = drawing_.curves.size();
    std::string source = fmt::format("{} at {} {}", item.type, isBinary_ ? "byte" : "line", item.at);
    for (curve::Curve& c : item.content.curves) {
      drawing_.curves.push_back({map != nullptr ? c.transformed(*map) : std::move(c), layer.name, source,
                                 drawing_.curves.size() > before});
      if (!isUsable(drawing_.curves.back().curve)) {
        drawing_.curves.resize(before, {curve::Line{}, "", "", false});
        note(drawing_.skipped, item.type, "its size or place is out of range", placeOf(item));
        return {};
      }
    }
    if (!layer.used) drawing_.layers.push_back(layer.name);
    layer.used = true;
    return {};
  }

  Error tooMany() const {
    return damaged(fmt::format(
        "expands to more than {} curves, or blocks nested without end; simplify its blocks or arrays",
        options_.maxCurves));
  }

  Result<void> insert(const Item& item, const Affine2* map, std::size_t layer, int depth) {
    const InsertRef& ref = *item.content.insert;
    const auto found = blocks_.find(lowerCase(ref.block));
    if (found == blocks_.end() || found->second.isOutside) {
      note(drawing_.skipped, item.type,
           found == blocks_.end() ? "its block is not in the file" : "its block lies in another file",
           fmt::format("{}, block '{}'", placeOf(item), decoded(ref.block.substr(0, 80), codePage_)));
      return {};
    }
    if (depth >= kDeepestBlock) {
      return damaged(fmt::format("{}: blocks are nested more than {} deep or contain themselves; redraw them",
                                 placeOf(item), kDeepestBlock));
    }
    const Affine2 inner = ref.map * Affine2::translation(-found->second.base);
    for (long long row = 0; row < ref.rows; ++row) {
      for (long long column = 0; column < ref.columns; ++column) {
        if (auto counted = countStep(); !counted) return counted;
        const Vec2 cell{static_cast<double>(column) * ref.step.x, static_cast<double>(row) * ref.step.y};
        Affine2 placed = ref.outer * Affine2::translation(cell) * inner;
        if (map != nullptr) placed = *map * placed;
        if (auto done = expand(found->second.items, &placed, layer, depth + 1); !done) return done;
      }
    }
    return {};
  }

  GroupStream stream_;
  std::string_view name_;
  const ReadOptions& options_;
  RunControl& control_;
  Drawing drawing_;
  LayerTable layers_;
  Record record_;
  Group pending_;
  std::string section_, codePage_;
  bool isBinary_ = false, sawEntities_ = false, hasPending_ = false;
  std::map<std::string, Block, std::less<>> blocks_;
  Block* block_ = nullptr;
  std::optional<OpenPolyline> polyline_;
  std::vector<Item> entities_;
  std::size_t records_ = 0, steps_ = 0;
};

}  // namespace

Result<Drawing> readDxf(std::string_view bytes, std::string_view name, const ReadOptions& options,
                        RunControl& control) {
  if (bytes.substr(0, 4) == "AC10") {
    return Error{ErrorCode::cannotRead,
                 fmt::format("{} holds a DWG drawing, which is not read; save it as DXF", name)};
  }
  return DxfReader(bytes, name, options, control).run();
}

}  // namespace kf::read
