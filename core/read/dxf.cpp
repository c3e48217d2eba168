// DXF text: sections, layers, blocks and their expansion.
// Lengths in drawing units.
#include <algorithm>
#include <array>
#include <map>
#include <string>

#include <fmt/format.h>

#include "core/read/dxf_entities.h"
#include "core/read/text.h"

namespace kf::read {
namespace {

using curve::Affine2;
using curve::Vec2;

constexpr int kDeepestBlock = 32;

struct Unit {
  std::string_view name;
  double millimetres;
};

// $INSUNITS 0..24. Source: the public DXF reference; US survey foot = 1200/3937 m.
constexpr double kSurveyFoot = 1200.0 / 3937.0 * 1000.0;
constexpr std::array<Unit, 25> kUnits = {{{"", 0.0},
                                          {"in", 25.4},
                                          {"ft", 304.8},
                                          {"mi", 1609344.0},
                                          {"mm", 1.0},
                                          {"cm", 10.0},
                                          {"m", 1000.0},
                                          {"km", 1e6},
                                          {"microinch", 25.4e-6},
                                          {"mil", 0.0254},
                                          {"yd", 914.4},
                                          {"angstrom", 1e-7},
                                          {"nm", 1e-6},
                                          {"um", 1e-3},
                                          {"dm", 100.0},
                                          {"dam", 1e4},
                                          {"hm", 1e5},
                                          {"Gm", 1e12},
                                          {"au", 149597870700e3},
                                          {"ly", 9460730472580.8e6},
                                          {"pc", 3.0856775814913673e19},
                                          {"US survey ft", kSurveyFoot},
                                          {"US survey in", kSurveyFoot / 12.0},
                                          {"US survey yd", 3.0 * kSurveyFoot},
                                          {"US survey mi", 5280.0 * kSurveyFoot}}};

// An entity as read, before blocks are expanded.
struct Item {
  std::string layer, type;
  std::size_t line = 0;
  EntityContent content;
};

struct Block {
  Vec2 base;
  std::vector<Item> items;
};

// Collects the vertices that follow an old-style POLYLINE.
struct OpenPolyline {
  Item item;
  std::vector<BulgeVertex> vertices;
  std::vector<double> heights;
  Affine2 map;
  long long flags = 0;
};

class DxfReader {
 public:
  DxfReader(std::string_view bytes, std::string_view name, const ReadOptions& options, RunControl& control)
      : stream_(bytes, name), name_(name), options_(options), control_(control) {}

  Result<Drawing> run() {
    drawing_.format = "DXF";
    for (;;) {
      auto more = nextRecord();
      if (!more) return more.error();
      if (!*more) {
        return damaged(fmt::format("ends at line {} without EOF; the file is cut short, get a whole copy",
                                   stream_.line()));
      }
      if (record_.type == "EOF") break;
      if (auto taken = take(); !taken) return taken.error();
    }
    if (!section_.empty())
      return damaged(
          fmt::format("line {}: EOF inside section {}; the file is damaged", record_.line, section_));
    if (!sawEntities_) return damaged("has no ENTITIES section; the file is damaged or holds no drawing");
    if (auto done = expand(entities_, Affine2{}, "", 0); !done) return done.error();
    return std::move(drawing_);
  }

 private:
  Error damaged(std::string_view what) const {
    return {ErrorCode::cannotRead, fmt::format("{} {}", name_, what)};
  }

  // Gathers the groups up to the next group 0. HEADER variables arrive as one record whose type is SECTION.
  Result<bool> nextRecord() {
    if (!pending_) {
      auto first = stream_.next();
      if (!first) return first.error();
      if (!*first) return false;
      pending_ = **first;
      if (pending_->code != 0) {
        return damaged(fmt::format("line {}: begins with group {} instead of 0; it is not a DXF text file",
                                   pending_->line, pending_->code));
      }
    }
    record_.type = trimmed(pending_->value);
    record_.line = pending_->line;
    record_.groups.clear();
    pending_.reset();
    for (;;) {
      auto group = stream_.next();
      if (!group) return group.error();
      if (!*group) return true;
      if ((**group).code == 0) {
        pending_ = **group;
        return true;
      }
      record_.groups.push_back(**group);
    }
  }

  Result<void> take() {
    if ((++records_ & 1023U) == 0) {
      if (control_.isCancelled()) return Error{ErrorCode::cancelled, "cancelled"};
      control_.report(0.9 * stream_.progress());
    }
    if (record_.type == "SECTION") return beginSection();
    if (record_.type == "ENDSEC") {
      if (section_.empty())
        return damaged(fmt::format("line {}: ENDSEC without SECTION; the file is damaged", record_.line));
      if (polyline_ || block_ != nullptr) {
        return damaged(fmt::format("line {}: section {} ends inside a {}; the file is damaged", record_.line,
                                   section_, polyline_ ? "POLYLINE" : "BLOCK"));
      }
      section_.clear();
      return {};
    }
    if (section_.empty())
      return damaged(fmt::format("line {}: {} outside any section; the file is damaged", record_.line,
                                 toUtf8(record_.type)));
    if (section_ == "TABLES") return tableEntry();
    if (section_ == "BLOCKS") return blockEntry();
    if (section_ == "ENTITIES") return entity(entities_);
    return {};
  }

  Result<void> beginSection() {
    if (!section_.empty())
      return damaged(
          fmt::format("line {}: SECTION inside section {}; the file is damaged", record_.line, section_));
    const Group* name = record_.find(2);
    if (name == nullptr)
      return damaged(fmt::format("line {}: a SECTION without a name; the file is damaged", record_.line));
    section_ = std::string(trimmed(name->value));
    if (section_ == "ENTITIES") sawEntities_ = true;
    if (section_ == "HEADER") return header();
    return {};
  }

  Result<void> header() {
    std::string_view variable;
    for (const Group& g : record_.groups) {
      if (g.code == 9) variable = trimmed(g.value);
      if (variable != "$INSUNITS" || g.code != 70) continue;
      const auto code = parseInteger(g.value);
      if (!code || *code < 0 || *code >= static_cast<long long>(kUnits.size())) {
        return damaged(fmt::format("line {}: $INSUNITS must be 0 to 24, not '{}'", g.line,
                                   toUtf8(g.value.substr(0, 20))));
      }
      const Unit& unit = kUnits[static_cast<std::size_t>(*code)];
      if (unit.millimetres > 0.0) {
        drawing_.millimetresPerUnit = unit.millimetres;
        drawing_.unitName = unit.name;
      }
    }
    return {};
  }

  Result<void> tableEntry() {
    if (record_.type != "LAYER" || record_.find(2) == nullptr) return {};
    const auto flags = integer(record_, 70, 0, name_), colour = integer(record_, 62, 7, name_);
    if (!flags) return flags.error();
    if (!colour) return colour.error();
    if ((*flags & 1) != 0) hidden_[std::string(record_.find(2)->value)] = "its layer is frozen";
    if (*colour < 0) hidden_[std::string(record_.find(2)->value)] = "its layer is off";
    return {};
  }

  Result<void> blockEntry() {
    if (record_.type == "BLOCK") {
      const Group* name = record_.find(2);
      if (name == nullptr)
        return damaged(fmt::format("line {}: a BLOCK without a name; the file is damaged", record_.line));
      const auto x = number(record_, 10, 0.0, name_), y = number(record_, 20, 0.0, name_);
      if (!x) return x.error();
      if (!y) return y.error();
      block_ = &blocks_[std::string(name->value)];
      *block_ = Block{{*x, *y}, {}};
      return {};
    }
    if (record_.type == "ENDBLK") {
      block_ = nullptr;
      return {};
    }
    if (block_ == nullptr) return {};
    return entity(block_->items);
  }

  Result<void> entity(std::vector<Item>& target) {
    if (polyline_) return polylinePart(target);
    Item item;
    item.type = toUtf8(record_.type);
    item.line = record_.line;
    const Group* layer = record_.find(8);
    item.layer = layer == nullptr ? "0" : std::string(layer->value);
    const auto paper = integer(record_, 67, 0, name_), invisible = integer(record_, 60, 0, name_);
    if (!paper) return paper.error();
    if (!invisible) return invisible.error();
    if (record_.type == "POLYLINE") return beginPolyline(std::move(item), *paper, *invisible);
    if (record_.type == "SEQEND" || record_.type == "VERTEX") return {};  // after attributes of an INSERT
    auto content = interpret(record_, name_);
    if (!content) return content.error();
    item.content = std::move(*content);
    hideWhere(item, *paper, *invisible);
    target.push_back(std::move(item));
    return {};
  }

  static void hideWhere(Item& item, long long paper, long long invisible) {
    const std::string reason = paper == 1       ? "it stands on the paper sheet, not in the drawing"
                               : invisible == 1 ? "it is invisible"
                                                : "";
    if (reason.empty()) return;
    item.content = {};
    item.content.ignoreReason = reason;
  }

  Result<void> beginPolyline(Item item, long long paper, long long invisible) {
    const auto flags = integer(record_, 70, 0, name_);
    if (!flags) return flags.error();
    const auto map = objectMap(record_, name_);
    if (!map) return map.error();
    OpenPolyline open;
    open.flags = *flags;
    open.map = map->value_or(Affine2{});
    if (!*map) item.content.skipReason = "it is not parallel to the XY plane";
    if ((*flags & (16 | 64)) != 0) item.content.skipReason = "a mesh has no contour";
    hideWhere(item, paper, invisible);
    open.item = std::move(item);
    polyline_ = std::move(open);
    return {};
  }

  Result<void> polylinePart(std::vector<Item>& target) {
    if (record_.type == "VERTEX") {
      const auto x = number(record_, 10, 0.0, name_), y = number(record_, 20, 0.0, name_),
                 z = number(record_, 30, 0.0, name_), bulge = number(record_, 42, 0.0, name_);
      const auto flags = integer(record_, 70, 0, name_);
      for (const auto* value : {&x, &y, &z, &bulge}) {
        if (!*value) return value->error();
      }
      if (!flags) return flags.error();
      if ((*flags & 16) != 0) return {};  // a control point of a fitted curve, not on it
      polyline_->vertices.push_back({{*x, *y}, *bulge});
      polyline_->heights.push_back(*z);
      return {};
    }
    if (record_.type != "SEQEND") {
      return damaged(fmt::format("line {}: {} inside a POLYLINE that has no SEQEND; the file is damaged",
                                 record_.line, toUtf8(record_.type)));
    }
    Item item = std::move(polyline_->item);
    if (item.content.skipReason.empty() && item.content.ignoreReason.empty()) finishPolyline(item);
    polyline_.reset();
    target.push_back(std::move(item));
    return {};
  }

  void finishPolyline(Item& item) {
    const auto& heights = polyline_->heights;
    if ((polyline_->flags & 8) != 0 && !heights.empty()) {
      const auto [low, high] = std::minmax_element(heights.begin(), heights.end());
      if (*high - *low > 1e-9 * std::max(1.0, std::abs(*high))) {
        item.content.skipReason = "it leaves the XY plane";
        return;
      }
    }
    for (const curve::Curve& piece : polylineCurves(polyline_->vertices, (polyline_->flags & 1) != 0)) {
      item.content.curves.push_back(piece.transformed(polyline_->map));
    }
    if (item.content.curves.empty()) item.content.skipReason = "it has fewer than two different vertices";
  }

  // Copies items into the drawing, blocks expanded. Layer 0 in a block stands for the layer of its insert.
  Result<void> expand(const std::vector<Item>& items, const Affine2& map, const std::string& insertLayer,
                      int depth) {
    for (const Item& item : items) {
      if ((++expanded_ & 4095U) == 0 && control_.isCancelled())
        return Error{ErrorCode::cancelled, "cancelled"};
      if (expanded_ > 4 * options_.maxCurves) return tooMany();
      const std::string& layer = item.layer == "0" && depth > 0 ? insertLayer : item.layer;
      const std::string place = fmt::format("line {}", item.line);
      if (!item.content.ignoreReason.empty()) {
        note(drawing_.ignored, item.type, item.content.ignoreReason, place);
        continue;
      }
      if (const auto hidden = hidden_.find(layer); hidden != hidden_.end()) {
        note(drawing_.ignored, item.type, hidden->second, place);
        continue;
      }
      if (!item.content.skipReason.empty()) {
        note(drawing_.skipped, item.type, item.content.skipReason, place);
        continue;
      }
      if (item.content.insert) {
        if (auto done = insert(item, map, layer, depth); !done) return done;
        continue;
      }
      if (!isWanted(layer)) {
        note(drawing_.ignored, item.type, "its layer was not chosen", place);
        continue;
      }
      if (auto added = addCurves(item, map, layer, place); !added) return added;
    }
    return {};
  }

  Result<void> addCurves(const Item& item, const Affine2& map, const std::string& layer,
                         const std::string& place) {
    const std::string shown = toUtf8(layer);
    if (std::find(drawing_.layers.begin(), drawing_.layers.end(), shown) == drawing_.layers.end())
      drawing_.layers.push_back(shown);
    if (drawing_.curves.size() + item.content.curves.size() > options_.maxCurves) return tooMany();
    for (const curve::Curve& c : item.content.curves) {
      drawing_.curves.push_back(
          {expandedFromBlock_ ? c.transformed(map) : c, shown, item.type + " at " + place});
    }
    return {};
  }

  Error tooMany() const {
    return damaged(
        fmt::format("expands to more than {} curves; simplify its blocks or arrays", options_.maxCurves));
  }

  bool isWanted(const std::string& layer) const {
    return options_.layers.empty() ||
           std::find(options_.layers.begin(), options_.layers.end(), toUtf8(layer)) != options_.layers.end();
  }

  Result<void> insert(const Item& item, const Affine2& map, const std::string& layer, int depth) {
    const InsertRef& ref = *item.content.insert;
    const auto block = blocks_.find(ref.block);
    const std::string place = fmt::format("line {}", item.line);
    if (block == blocks_.end()) {
      note(drawing_.skipped, item.type, "its block '" + toUtf8(ref.block) + "' is not in the file", place);
      return {};
    }
    if (depth >= kDeepestBlock) {
      return damaged(fmt::format(
          "line {}: blocks are nested more than {} deep or contain themselves; the file is damaged",
          item.line, kDeepestBlock));
    }
    for (Vec2 cell : ref.cells) {
      const Affine2 inner =
          ref.outer * Affine2::translation(cell) * ref.map * Affine2::translation(-block->second.base);
      const bool outermost = !expandedFromBlock_;
      expandedFromBlock_ = true;
      auto done = expand(block->second.items, map * inner, layer, depth + 1);
      if (outermost) expandedFromBlock_ = false;
      if (!done) return done;
    }
    return {};
  }

  GroupStream stream_;
  std::string_view name_;
  const ReadOptions& options_;
  RunControl& control_;
  Drawing drawing_;
  Record record_;
  std::optional<Group> pending_;
  std::string section_;
  bool sawEntities_ = false, expandedFromBlock_ = false;
  std::map<std::string, std::string, std::less<>> hidden_;
  std::map<std::string, Block, std::less<>> blocks_;
  Block* block_ = nullptr;
  std::optional<OpenPolyline> polyline_;
  std::vector<Item> entities_;
  std::size_t records_ = 0, expanded_ = 0;
};

}  // namespace

Result<Drawing> readDxf(std::string_view bytes, std::string_view name, const ReadOptions& options,
                        RunControl& control) {
  return DxfReader(bytes, name, options, control).run();
}

}  // namespace kf::read
