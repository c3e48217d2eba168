// SVG: walking the tree, expanding uses, and turning what shows into curves.
// Lengths in the page's own unit.
#include <algorithm>
#include <array>
#include <cmath>
#include <numbers>
#include <string>
#include <unordered_set>

#include <fmt/format.h>

#include "core/read/svg_document.h"
#include "core/read/svg_layout.h"
#include "core/read/svg_path.h"
#include "core/read/text.h"

namespace kf::read {
namespace {

using curve::Affine2;
using curve::Curve;
using curve::Vec2;
using svg::Declared;
using svg::Document;
using svg::Property;

constexpr std::size_t kDeepestUse = 32;
constexpr int kDeepestWalk = 1024;  // elements and uses together
constexpr std::size_t kMostVisits = 5'000'000;

// What children inherit.
struct State {
  Affine2 map;
  svg::Viewport viewport;
  bool visible = true, filled = true, stroked = false;
  std::string layer;
  bool layerNamed = false;  // by a group that says it is a layer: inner groups don't rename it
  int depth = 0;
};

// The size that a <use> gives to the symbol or svg it shows.
struct UseSize {
  std::optional<double> width, height;
};

enum class Role { shape, container, use, text, foreign, picture, silent, unknown };

struct Known {
  std::string_view name;
  Role role;
};
constexpr std::array<Known, 63> kKnown = {{
    {"path", Role::shape},
    {"rect", Role::shape},
    {"circle", Role::shape},
    {"ellipse", Role::shape},
    {"line", Role::shape},
    {"polyline", Role::shape},
    {"polygon", Role::shape},
    {"g", Role::container},
    {"a", Role::container},
    {"svg", Role::container},
    {"switch", Role::container},
    {"use", Role::use},
    {"text", Role::text},
    {"flowRoot", Role::text},
    {"foreignObject", Role::foreign},
    {"image", Role::picture},
    {"video", Role::picture},
    {"audio", Role::picture},
    {"canvas", Role::picture},
    {"iframe", Role::picture},
    {"defs", Role::silent},
    {"symbol", Role::silent},
    {"clipPath", Role::silent},
    {"mask", Role::silent},
    {"pattern", Role::silent},
    {"marker", Role::silent},
    {"linearGradient", Role::silent},
    {"radialGradient", Role::silent},
    {"meshgradient", Role::silent},
    {"hatch", Role::silent},
    {"filter", Role::silent},
    {"style", Role::silent},
    {"script", Role::silent},
    {"title", Role::silent},
    {"desc", Role::silent},
    {"metadata", Role::silent},
    {"view", Role::silent},
    {"cursor", Role::silent},
    {"font", Role::silent},
    {"font-face", Role::silent},
    {"color-profile", Role::silent},
    {"animate", Role::silent},
    {"animateColor", Role::silent},
    {"animateMotion", Role::silent},
    {"animateTransform", Role::silent},
    {"set", Role::silent},
    {"mpath", Role::silent},
    {"solidcolor", Role::silent},
    {"solidColor", Role::silent},
    {"glyph", Role::silent},
    {"missing-glyph", Role::silent},
    {"hkern", Role::silent},
    {"vkern", Role::silent},
    {"stop", Role::silent},
    {"discard", Role::silent},
    {"source", Role::silent},
    {"track", Role::silent},
    {"unknown", Role::unknown},
    {"tspan", Role::silent},
    {"textPath", Role::silent},
    {"tref", Role::silent},
    {"altGlyph", Role::silent},
    {"altGlyphDef", Role::silent},
}};

Role roleOf(std::string_view kind) {
  const auto found =
      std::find_if(kKnown.begin(), kKnown.end(), [kind](const Known& k) { return k.name == kind; });
  return found == kKnown.end() ? Role::unknown : found->role;
}

bool hasText(pugi::xml_node element) {
  for (const pugi::xml_node part : element.children()) {
    if (part.type() == pugi::node_pcdata || part.type() == pugi::node_cdata) {
      if (!svg::stripped(part.value()).empty()) return true;
    } else if (hasText(part)) {  // depth is bounded by the document's own
      return true;
    }
  }
  return false;
}

// Circles stay arcs even when two maps undo each other's stretching.
Curve simplest(Curve curve) {
  const curve::EllipticArc* e = curve.asEllipticArc();
  if (e == nullptr) return curve;
  const double u = norm(e->u), v = norm(e->v), bound = 1e-13 * u * u;
  if (std::abs(dot(e->u, e->v)) > bound || std::abs(u * u - v * v) > bound) return curve;
  const double turn = cross(e->u, e->v) < 0.0 ? -1.0 : 1.0;
  return curve::Arc{e->centre, u, std::atan2(e->u.y, e->u.x) + turn * e->start, turn * e->sweep};
}

bool isNone(std::string_view paint) {
  return paint == "none" || paint == "transparent";
}

class SvgReader {
 public:
  SvgReader(std::string_view name, const ReadOptions& options, RunControl& control)
      : name_(name), options_(options), control_(control) {}

  Result<Drawing> run(std::string_view bytes) {
    drawing_.format = "SVG";
    if (auto loaded = document_.load(bytes, name_); !loaded) return loaded.error();
    for (const std::string& rule : document_.sheet().unclear()) {
      note(drawing_.skipped, "style rule", "its selector or condition is not understood",
           fmt::format("\"{}\"", rule.substr(0, 60)));
    }
    const pugi::xml_node root = document_.root();
    const Declared declared = document_.sheet().declaredFor(root);
    auto page = svg::layOut(declared, root.attribute("viewBox").as_string(),
                            root.attribute("preserveAspectRatio").as_string());
    if (!page) return Error{page.error().code, fmt::format("{}: {}", name_, page.error().message)};
    drawing_.unitName = page->unit;
    drawing_.millimetresPerUnit = page->millimetres;
    if (!page->physical) {
      drawing_.warnings.emplace_back(
          "no physical size is given; a pixel is taken as 1/96 in (0.26458 mm), check the size");
    }
    State state;
    state.map = page->map;
    state.viewport = page->viewport;
    if (inherit(root, declared, state)) {
      if (auto done = children(root, state); !done) return done.error();
    }
    warnOfClips();
    return std::move(drawing_);
  }

 private:
  Error refused(pugi::xml_node element, std::string_view what) const {
    return {ErrorCode::unsupported, fmt::format("{} {}: {}", name_, document_.place(element), what)};
  }
  void skip(pugi::xml_node element, std::string_view reason) {
    note(drawing_.skipped, svg::localName(element.name()), reason, document_.place(element));
  }
  void ignore(pugi::xml_node element, std::string_view reason) {
    note(drawing_.ignored, svg::localName(element.name()), reason, document_.place(element));
  }

  void warnOfClips() {
    if (clipped_ == 0) return;
    drawing_.warnings.push_back(fmt::format(
        "{} element{} clipped or masked in the picture (first at {}); the whole outlines were read", clipped_,
        clipped_ == 1 ? " is" : "s are", firstClipped_));
  }

  // Takes the element's own style into the state; false when neither it nor its children are to be drawn.
  bool inherit(pugi::xml_node element, const Declared& declared, State& state) {
    if (element.attribute("requiredExtensions")) return false;
    if (const pugi::xml_attribute languages = element.attribute("systemLanguage");
        languages && std::string_view(languages.value()).find("en") == std::string_view::npos) {
      return false;
    }
    if (declared.get(Property::display) == "none") {
      ignore(element, "is not shown (display)");
      return false;
    }
    if (const auto v = declared.get(Property::visibility); v && *v != "inherit")
      state.visible = *v == "visible";
    if (const auto paint = declared.get(Property::fill); paint && *paint != "inherit")
      state.filled = !isNone(*paint);
    if (const auto paint = declared.get(Property::stroke); paint && *paint != "inherit")
      state.stroked = !isNone(*paint);
    if (const auto clip = declared.get(Property::clipPath), mask = declared.get(Property::mask);
        (clip && *clip != "none") || (mask && *mask != "none")) {
      if (clipped_++ == 0) firstClipped_ = document_.place(element);
    }
    return place(element, declared, state);
  }

  bool place(pugi::xml_node element, const Declared& declared, State& state) {
    const auto text = declared.get(Property::transform);
    if (!text || text->empty()) return true;
    auto map = svg::parseTransform(*text);
    if (!map) {
      skip(element, "its transform is not understood");
      return false;
    }
    if (const auto origin = declared.get(Property::transformOrigin)) {
      const auto centre = originOf(*origin);
      if (!centre) {
        skip(element, "its transform-origin is not in pixels");
        return false;
      }
      map = Affine2::translation(*centre) * *map * Affine2::translation(-*centre);
    }
    state.map = state.map * *map;
    const double size =
        std::max(std::hypot(state.map.xx, state.map.yx), std::hypot(state.map.xy, state.map.yy));
    const double flat = std::abs(state.map.determinant());
    if (!std::isfinite(size) || !std::isfinite(state.map.dx) || !std::isfinite(state.map.dy)) {
      skip(element, "its transform is too large");
      return false;
    }
    if (!(flat > 1e-12 * size * size) || !(size > 1e-100)) {
      ignore(element, "is flattened to nothing by its transform");
      return false;
    }
    return true;
  }

  static std::optional<Vec2> originOf(std::string_view text) {
    const std::size_t gap = text.find_first_of(" ,\t");
    const auto x = svg::parseLength(text.substr(0, gap));
    const auto y = gap == std::string_view::npos ? x : svg::parseLength(text.substr(gap + 1));
    if (!x || !y) return std::nullopt;
    const bool share = x->unit == svg::LengthUnit::percent || y->unit == svg::LengthUnit::percent;
    if (share && !(x->value == 0.0 && y->value == 0.0)) return std::nullopt;
    if (gap == std::string_view::npos && x->value != 0.0) return std::nullopt;  // the other one is 50 %
    return Vec2{x->value * svg::pixelsPer(x->unit), y->value * svg::pixelsPer(y->unit)};
  }

  Result<void> children(pugi::xml_node element, const State& state) {
    const bool onlyOne = document_.kind(element) == "switch";
    for (const pugi::xml_node child : element.children()) {
      if (child.type() != pugi::node_element) continue;
      if (onlyOne && !wanted(child)) continue;
      if (auto done = visit(child, state); !done) return done;
      if (onlyOne) break;
    }
    return {};
  }

  // Whether a <switch> takes this child.
  bool wanted(pugi::xml_node child) const {
    const pugi::xml_attribute languages = child.attribute("systemLanguage");
    return !document_.kind(child).empty() && !child.attribute("requiredExtensions") &&
           (!languages || std::string_view(languages.value()).find("en") != std::string_view::npos);
  }

  Result<void> visit(pugi::xml_node element, State state) {
    const std::string_view kind = document_.kind(element);
    if (kind.empty()) return {};  // of another vocabulary, which SVG does not draw
    if ((++visits_ & 1023U) == 0 && control_.isCancelled()) return Error{ErrorCode::cancelled, "cancelled"};
    if (visits_ > kMostVisits)
      return refused(element, fmt::format("expands to more than {} elements; simplify it", kMostVisits));
    if (++state.depth > kDeepestWalk) return refused(element, "is nested too deeply; ungroup it");
    const Role role = roleOf(kind);
    if (role == Role::silent) return {};
    const Declared declared = document_.sheet().declaredFor(element);
    if (!inherit(element, declared, state)) return {};
    switch (role) {
      case Role::shape:
        return shape(element, kind, declared, state);
      case Role::container:
        return container(element, kind, declared, state);
      case Role::use:
        return use(element, declared, state);
      case Role::text:
        if (state.visible && hasText(element)) skip(element, "text has no contour; turn it into paths");
        return {};
      case Role::foreign:
        skip(element, "content of another kind can't be read");
        return {};
      case Role::picture:
        ignore(element, "a picture has no contour");
        return {};
      default:
        note(drawing_.ignored, "element", "is none of SVG", document_.place(element));
        return {};
    }
  }

  Result<void> container(pugi::xml_node element, std::string_view kind, const Declared& declared,
                         State& state) {
    nameLayer(element, state);
    if (kind == "svg" && !enterViewport(element, declared, state, {})) return {};
    return children(element, state);
  }

  // A group's own label or id; once a group says that it is a layer its inner groups don't count.
  static void nameLayer(pugi::xml_node element, State& state) {
    if (state.layerNamed) return;
    const std::string_view label = element.attribute("inkscape:label").as_string();
    const std::string_view id = element.attribute("id").as_string();
    const bool isLayer = std::string_view(element.attribute("inkscape:groupmode").as_string()) == "layer";
    if (!isLayer && !state.layer.empty()) return;
    const std::string_view text = label.empty() ? id : label;
    if (!text.empty()) state.layer = toUtf8(text);
    state.layerNamed = isLayer && !text.empty();
  }

  // A length of the element; `fallback` when it has none. Empty, and the element noted, when it is bad.
  std::optional<double> length(pugi::xml_node element, const Declared& declared, Property property,
                               double whole, double fallback) {
    const auto text = declared.get(property);
    if (!text || text->empty() || *text == "auto") return fallback;
    const auto value = svg::resolve(*text, whole);
    if (!value || !std::isfinite(*value)) {
      skip(element, fmt::format("its {} is no length that is known here", nameOf(property)));
      return std::nullopt;
    }
    return value;
  }

  // Of an inner svg or a symbol: the map into its own user units. False when nothing of it shows.
  bool enterViewport(pugi::xml_node element, const Declared& declared, State& state, const UseSize& given) {
    const double w = state.viewport.width, h = state.viewport.height;
    const bool isSvg = document_.kind(element) == "svg";
    const auto x = isSvg ? length(element, declared, Property::x, w, 0.0) : std::optional(0.0);
    const auto y = isSvg ? length(element, declared, Property::y, h, 0.0) : std::optional(0.0);
    auto width = length(element, declared, Property::width, w, w);
    auto height = length(element, declared, Property::height, h, h);
    if (!x || !y || !width || !height) return false;
    if (given.width) width = given.width;
    if (given.height) height = given.height;
    const std::string_view boxText = svg::stripped(element.attribute("viewBox").as_string());
    const auto fit = svg::parseFit(element.attribute("preserveAspectRatio").as_string());
    const auto box = boxText.empty() ? std::nullopt : svg::parseViewBox(boxText);
    if (!fit || (!boxText.empty() && !box)) {
      skip(element, "its viewBox or preserveAspectRatio is not understood");
      return false;
    }
    if (!box) {
      state.map = state.map * Affine2::translation({*x, *y});
      state.viewport = {*width, *height};
      return true;
    }
    if (!(*width > 0.0 && *height > 0.0 && box->width > 0.0 && box->height > 0.0)) {
      ignore(element, "has no size, so nothing of it shows");
      return false;
    }
    state.map = state.map * fitMap(*box, *fit, *x, *y, *width, *height);
    state.viewport = {box->width, box->height};
    return true;
  }

  Result<void> use(pugi::xml_node element, const Declared& declared, State& state) {
    pugi::xml_attribute link = element.attribute("href");
    if (!link) link = element.attribute("xlink:href");
    const std::string_view target = svg::stripped(link.as_string());
    if (target.empty()) {
      skip(element, "it does not say what to use");
      return {};
    }
    if (target.front() != '#')
      return refused(element, fmt::format("uses \"{}\" from outside the drawing; put it inside", target));
    const pugi::xml_node content = document_.byId(target.substr(1));
    if (!content) {
      skip(element, "what it uses is not in the drawing");
      return {};
    }
    if (std::find(open_.begin(), open_.end(), content) != open_.end() || isInside(element, content)) {
      skip(element, "it uses itself");
      return {};
    }
    if (open_.size() == kDeepestUse)
      return refused(element, fmt::format("nests uses more than {} deep; expand them", kDeepestUse));
    const auto x = length(element, declared, Property::x, state.viewport.width, 0.0);
    const auto y = length(element, declared, Property::y, state.viewport.height, 0.0);
    const auto width = length(element, declared, Property::width, state.viewport.width, -1.0);
    const auto height = length(element, declared, Property::height, state.viewport.height, -1.0);
    if (!x || !y || !width || !height) return {};
    UseSize size;
    if (*width >= 0.0) size.width = width;
    if (*height >= 0.0) size.height = height;
    nameLayer(element, state);
    state.map = state.map * Affine2::translation({*x, *y});
    open_.push_back(content);
    auto done = used(content, state, size);
    open_.pop_back();
    return done;
  }

  static bool isInside(pugi::xml_node element, pugi::xml_node outer) {
    for (pugi::xml_node up = element; up; up = up.parent()) {
      if (up == outer) return true;
    }
    return false;
  }

  Result<void> used(pugi::xml_node content, State& state, const UseSize& size) {
    const std::string_view kind = document_.kind(content);
    if (kind != "symbol" && kind != "svg") return visit(content, state);
    ++visits_;
    ++state.depth;
    const Declared declared = document_.sheet().declaredFor(content);
    if (!inherit(content, declared, state) || !enterViewport(content, declared, state, size)) return {};
    return children(content, state);
  }

  Result<void> shape(pugi::xml_node element, std::string_view kind, const Declared& declared, State& state) {
    if (!state.visible) {
      ignore(element, "is not shown (visibility)");
      return {};
    }
    if (!state.stroked && (!state.filled || kind == "line")) {
      ignore(element, "is neither filled nor stroked");
      return {};
    }
    if (kind == "path") return path(element, declared, state);
    if (kind == "rect") return rectangle(element, declared, state);
    if (kind == "circle" || kind == "ellipse") return ellipse(element, kind == "circle", declared, state);
    if (kind == "line") return line(element, state);
    const auto numbers = svg::numberList(element.attribute("points").as_string());
    if (!numbers || numbers->size() % 2 != 0) {
      skip(element, "its points are not pairs of numbers");
      return {};
    }
    std::vector<Vec2> points;
    for (std::size_t i = 0; i < numbers->size(); i += 2) points.push_back({(*numbers)[i], (*numbers)[i + 1]});
    return emit(element, svg::chainOfLines(points, kind == "polygon"), state);
  }

  Result<void> path(pugi::xml_node element, const Declared& declared, const State& state) {
    std::string_view data = declared.get(Property::d).value_or("");
    if (data.substr(0, 5) == "path(" && data.size() > 7 && data.back() == ')')
      data = data.substr(6, data.size() - 8);  // as CSS writes it, in quotes
    auto curves = svg::pathCurves(data);
    if (!curves) {
      note(drawing_.skipped, "path", "its data is damaged",
           fmt::format("{}, where {}", document_.place(element), curves.error().message));
      return {};
    }
    if (curves->empty()) ignore(element, "has no length");
    return emit(element, *std::move(curves), state);
  }

  Result<void> rectangle(pugi::xml_node element, const Declared& declared, const State& state) {
    const double w = state.viewport.width, h = state.viewport.height;
    const auto x = length(element, declared, Property::x, w, 0.0);
    const auto y = length(element, declared, Property::y, h, 0.0);
    const auto width = length(element, declared, Property::width, w, 0.0);
    const auto height = length(element, declared, Property::height, h, 0.0);
    auto rx = length(element, declared, Property::rx, w, -1.0);
    auto ry = length(element, declared, Property::ry, h, -1.0);
    if (!x || !y || !width || !height || !rx || !ry) return {};
    if (*width < 0.0 || *height < 0.0) {
      skip(element, "its size is negative");
      return {};
    }
    if (*width == 0.0 || *height == 0.0) {
      ignore(element, "has no size");
      return {};
    }
    // A radius that is not given, or negative, follows the other.
    double across = *rx < 0.0 ? std::max(*ry, 0.0) : *rx, down = *ry < 0.0 ? std::max(*rx, 0.0) : *ry;
    across = std::min(across, 0.5 * *width);
    down = std::min(down, 0.5 * *height);
    return emit(element, svg::rectangleCurves(*x, *y, *width, *height, across, down), state);
  }

  Result<void> ellipse(pugi::xml_node element, bool circle, const Declared& declared, const State& state) {
    const double w = state.viewport.width, h = state.viewport.height;
    const double diagonal = std::hypot(w, h) / std::numbers::sqrt2;
    const auto cx = length(element, declared, Property::cx, w, 0.0);
    const auto cy = length(element, declared, Property::cy, h, 0.0);
    auto rx = circle ? length(element, declared, Property::r, diagonal, 0.0)
                     : length(element, declared, Property::rx, w, -1.0);
    auto ry = circle ? rx : length(element, declared, Property::ry, h, -1.0);
    if (!cx || !cy || !rx || !ry) return {};
    if (!circle && !declared.get(Property::rx)) rx = ry;
    if (!circle && !declared.get(Property::ry)) ry = rx;
    if ((*rx < 0.0 || *ry < 0.0) && (circle || declared.get(Property::rx) || declared.get(Property::ry))) {
      skip(element, "its radius is negative");
      return {};
    }
    if (!(*rx > 0.0 && *ry > 0.0)) {
      ignore(element, "has no size");
      return {};
    }
    return emit(element, svg::ellipseCurves(*cx, *cy, *rx, *ry), state);
  }

  Result<void> line(pugi::xml_node element, const State& state) {
    std::array<double, 4> at{};
    constexpr std::array<const char*, 4> kNames = {"x1", "y1", "x2", "y2"};
    for (std::size_t i = 0; i < 4; ++i) {
      const std::string_view text = element.attribute(kNames[i]).as_string();
      if (text.empty()) continue;
      const auto value = svg::resolve(text, i % 2 == 0 ? state.viewport.width : state.viewport.height);
      if (!value) {
        skip(element, fmt::format("its {} is no length that is known here", kNames[i]));
        return {};
      }
      at[i] = *value;
    }
    return emit(element, svg::chainOfLines({{at[0], at[1]}, {at[2], at[3]}}, false), state);
  }

  Result<void> emit(pugi::xml_node element, std::vector<Curve> curves, const State& state) {
    if (!options_.layers.empty() &&
        std::find(options_.layers.begin(), options_.layers.end(), state.layer) == options_.layers.end()) {
      return {};
    }
    if (curves.empty()) return {};
    if (drawing_.curves.size() + curves.size() > options_.maxCurves) {
      return refused(element,
                     fmt::format("holds more than {} curves; split the drawing", options_.maxCurves));
    }
    const std::string source =
        fmt::format("{}, {}", svg::localName(element.name()), document_.place(element));
    const std::size_t before = drawing_.curves.size();
    for (const Curve& one : curves) {
      Curve placed = simplest(one.transformed(state.map));
      const curve::Box box = placed.bounds();
      if (!isFinite(box.low) || !isFinite(box.high)) {
        drawing_.curves.erase(drawing_.curves.begin() + static_cast<std::ptrdiff_t>(before),
                              drawing_.curves.end());
        skip(element, "its coordinates are too large");
        return {};
      }
      drawing_.curves.push_back({std::move(placed), state.layer, source});
    }
    if (!state.layer.empty() && layers_.insert(state.layer).second) drawing_.layers.push_back(state.layer);
    return {};
  }

  std::string name_;
  const ReadOptions& options_;
  RunControl& control_;
  Document document_;
  Drawing drawing_;
  std::vector<pugi::xml_node> open_;  // what is being used, outermost first
  std::unordered_set<std::string> layers_;
  std::size_t visits_ = 0, clipped_ = 0;
  std::string firstClipped_;
};

}  // namespace

Result<Drawing> readSvg(std::string_view bytes, std::string_view name, const ReadOptions& options,
                        RunControl& control) {
  return SvgReader(name, options, control).run(bytes);
}

}  // namespace kf::read
