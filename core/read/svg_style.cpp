// Style sheets and the cascade, as far as they decide what is drawn.
// No units here.
#include "core/read/svg_style.h"

#include <algorithm>
#include <cstring>

#include <fmt/format.h>

#include "core/read/svg_scan.h"

namespace kf::read::svg {
namespace {

constexpr std::size_t kProperties = static_cast<std::size_t>(Property::count);
constexpr std::array<std::string_view, kProperties> kNames = {
    "display", "visibility", "fill",  "stroke", "transform", "transform-origin",
    "x",       "y",          "width", "height", "cx",        "cy",
    "r",       "rx",         "ry",    "d",      "clip-path", "mask"};

// Ranks: the origin and !important above specificity above order.
constexpr unsigned long long kRuleRank = 1ULL << 60U, kInlineRank = 2ULL << 60U, kImportantRank = 4ULL << 60U;
constexpr std::size_t kLongestSelector = 64, kMostRules = 100'000;

std::optional<Property> propertyNamed(std::string_view name) {
  const auto found = std::find(kNames.begin(), kNames.end(), name);
  if (found == kNames.end()) return std::nullopt;
  return static_cast<Property>(found - kNames.begin());
}

bool isNameCharacter(char c) {
  return (c >= 'a' && c <= 'z') || (c >= 'A' && c <= 'Z') || (c >= '0' && c <= '9') || c == '_' || c == '-' ||
         static_cast<unsigned char>(c) >= 0x80;
}

std::string_view takeName(std::string_view& text) {
  std::size_t n = 0;
  while (n < text.size() && isNameCharacter(text[n])) ++n;
  const std::string_view name = text.substr(0, n);
  text.remove_prefix(n);
  return name;
}

// Comments become blanks, and so do the marks that once hid sheets from old programs.
void blankOut(std::string& text, std::string_view from, std::string_view to) {
  for (std::size_t at = text.find(from); at != std::string::npos; at = text.find(from, at)) {
    const std::size_t end = to.empty() ? at + from.size() : text.find(to, at + from.size());
    const std::size_t stop = end == std::string::npos ? text.size() : end + to.size();
    std::fill(text.begin() + static_cast<std::ptrdiff_t>(at),
              text.begin() + static_cast<std::ptrdiff_t>(stop), ' ');
  }
}

// The place of the brace that closes the one at `open`, or the end.
std::size_t closingBrace(std::string_view text, std::size_t open) {
  std::size_t depth = 0;
  for (std::size_t i = open; i < text.size(); ++i) {
    if (text[i] == '{') ++depth;
    if (text[i] == '}' && --depth == 0) return i;
  }
  return text.size();
}

bool hasClass(std::string_view list, std::string_view name) {
  for (;;) {
    list = stripped(list);
    if (list.empty()) return false;
    const std::size_t end = list.find_first_of(" \t\r\n\f");
    if (list.substr(0, end) == name) return true;
    if (end == std::string_view::npos) return false;
    list.remove_prefix(end);
  }
}

}  // namespace

std::string_view nameOf(Property property) {
  return kNames[static_cast<std::size_t>(property)];
}

std::string_view localName(std::string_view name) {
  const std::size_t colon = name.find(':');
  return colon == std::string_view::npos ? name : name.substr(colon + 1);
}

void Declared::offer(Property property, std::string_view value, unsigned long long rank) {
  Entry& entry = entries_[static_cast<std::size_t>(property)];
  if (!entry.set || rank >= entry.rank) entry = {true, rank, stripped(value)};
}

std::vector<StyleSheet::Declaration> StyleSheet::declarations(std::string_view block) {
  std::vector<Declaration> list;
  while (!block.empty()) {
    const std::string_view one = block.substr(0, block.find(';'));
    block.remove_prefix(std::min(block.size(), one.size() + 1));
    const std::size_t colon = one.find(':');
    if (colon == std::string_view::npos) continue;
    const auto property = propertyNamed(stripped(one.substr(0, colon)));
    if (!property) continue;
    std::string_view value = stripped(one.substr(colon + 1));
    const std::size_t mark = value.rfind('!');
    const bool important = mark != std::string_view::npos && stripped(value.substr(mark + 1)) == "important";
    if (important) value = stripped(value.substr(0, mark));
    list.push_back({*property, value, important});
  }
  return list;
}

std::optional<StyleSheet::Rule> StyleSheet::selector(std::string_view text) {
  Rule rule;
  bool child = false;
  text = stripped(text);
  while (!text.empty()) {
    Compound part;
    part.child = child;
    bool any = false;
    if (text.front() == '*') {
      text.remove_prefix(1);
      any = true;
    } else if (isNameCharacter(text.front())) {
      part.element = takeName(text);
      rule.specificity += 1;
      any = true;
    }
    while (!text.empty() && (text.front() == '.' || text.front() == '#')) {
      const bool isClass = text.front() == '.';
      text.remove_prefix(1);
      const std::string_view name = takeName(text);
      if (name.empty()) return std::nullopt;
      if (isClass) {
        part.classes.push_back(name);
      } else {
        part.id = name;
      }
      rule.specificity += isClass ? 1U << 8U : 1U << 16U;
      any = true;
    }
    if (!any || rule.parts.size() == kLongestSelector) return std::nullopt;
    rule.parts.push_back(std::move(part));
    const std::string_view rest = stripped(text);
    child = !rest.empty() && rest.front() == '>';
    if (!rest.empty() && rest.size() == text.size() && !child) return std::nullopt;  // :hover, [x], +, ~
    text = child ? stripped(rest.substr(1)) : rest;
    if (child && text.empty()) return std::nullopt;
  }
  if (rule.parts.empty()) return std::nullopt;
  return rule;
}

void StyleSheet::addRule(std::string_view selectors, std::string_view block) {
  const std::vector<Declaration> list = declarations(block);
  if (list.empty()) return;
  while (!stripped(selectors).empty()) {
    const std::string_view one = selectors.substr(0, selectors.find(','));
    selectors.remove_prefix(std::min(selectors.size(), one.size() + 1));
    auto rule = selector(one);
    if (rule && rules_.size() < kMostRules) {
      rule->declarations = list;
      rules_.push_back(*std::move(rule));
    } else if (one.find(":hover") == std::string_view::npos &&
               one.find(":active") == std::string_view::npos &&
               one.find(":focus") == std::string_view::npos) {
      unclear_.emplace_back(stripped(one));  // of a printed page nothing is hovered, pressed or focused
    }
  }
}

Result<void> StyleSheet::add(std::string text) {
  blankOut(text, "/*", "*/");
  blankOut(text, "<!--", "");
  blankOut(text, "-->", "");
  std::string_view rest = texts_.emplace_back(std::move(text));
  for (;;) {
    rest = stripped(rest);
    if (rest.empty()) return {};
    if (rest.front() == '@') {
      const std::size_t end = rest.find_first_of(";{");
      if (rest.substr(0, 7) == "@import")
        return Error{ErrorCode::unsupported, "imports a style sheet from outside the drawing (@import)"};
      if (end == std::string_view::npos) return {};
      const std::size_t stop = rest[end] == '{' ? closingBrace(rest, end) : end;
      const std::string_view kind = rest.substr(0, rest.find_first_of(" \t\r\n{;"));
      if (rest[end] == '{' && kind != "@font-face" && kind != "@keyframes" && kind != "@page")
        unclear_.emplace_back(stripped(rest.substr(0, end)));
      rest.remove_prefix(std::min(rest.size(), stop + 1));
      continue;
    }
    const std::size_t open = rest.find('{');
    if (open == std::string_view::npos) return {};
    const std::size_t close = closingBrace(rest, open);
    addRule(rest.substr(0, open), rest.substr(open + 1, close - open - 1));
    rest.remove_prefix(std::min(rest.size(), close + 1));
  }
}

bool StyleSheet::matches(const Compound& compound, pugi::xml_node element) {
  if (!compound.element.empty() && localName(element.name()) != compound.element) return false;
  if (!compound.id.empty() && element.attribute("id").as_string() != compound.id) return false;
  const std::string_view list = element.attribute("class").as_string();
  return std::all_of(compound.classes.begin(), compound.classes.end(),
                     [list](std::string_view name) { return hasClass(list, name); });
}

// From the element outwards. A descendant takes the nearest ancestor that fits; with a child rule to its left
// a farther one might have to be tried, so the search goes back to it.
bool StyleSheet::matches(const Rule& rule, pugi::xml_node element) {
  if (!matches(rule.parts.back(), element)) return false;
  std::size_t part = rule.parts.size() - 1;
  pugi::xml_node at = element, retryAt;
  std::size_t retryPart = 0;
  while (part > 0) {
    const bool direct = rule.parts[part].child;
    pugi::xml_node up = at.parent();
    if (!direct) {
      while (up && !matches(rule.parts[part - 1], up)) up = up.parent();
      if (!up) return false;
      retryAt = up;
      retryPart = part;
    } else if (!up || !matches(rule.parts[part - 1], up)) {
      if (!retryAt) return false;
      at = retryAt;  // pretend it did not fit and look farther out
      part = retryPart;
      continue;
    }
    at = up;
    --part;
  }
  return true;
}

Declared StyleSheet::declaredFor(pugi::xml_node element) const {
  Declared declared;
  std::string_view inlineStyle;
  for (const pugi::xml_attribute attribute : element.attributes()) {
    const std::string_view name = attribute.name();
    if (name == "style") {
      inlineStyle = attribute.value();
    } else if (const auto property = propertyNamed(name)) {
      declared.offer(*property, attribute.value(), 0);
    }
  }
  for (const Rule& rule : rules_) {
    if (!matches(rule, element)) continue;
    for (const Declaration& one : rule.declarations)
      declared.offer(one.property, one.value,
                     kRuleRank + rule.specificity + (one.important ? kImportantRank : 0));
  }
  for (const Declaration& one : declarations(inlineStyle))
    declared.offer(one.property, one.value, kInlineRank + (one.important ? kImportantRank : 0));
  return declared;
}

}  // namespace kf::read::svg
