// Style of SVG elements: presentation attributes, style attributes and simple style sheets; internal to read.
// No units here.
#pragma once

#include <array>
#include <cstddef>
#include <deque>
#include <optional>
#include <string>
#include <string_view>
#include <vector>

#include <pugixml.hpp>

#include "core/base/result.h"

namespace kf::read::svg {

// The properties that decide whether and where an element is seen.
enum class Property {
  display,
  visibility,
  fill,
  stroke,
  transform,
  transformOrigin,
  x,
  y,
  width,
  height,
  cx,
  cy,
  r,
  rx,
  ry,
  d,
  clipPath,
  mask,
  count
};
std::string_view nameOf(Property property);

// What is declared for one element, without inheritance. Views into the document or the sheet.
class Declared {
 public:
  std::optional<std::string_view> get(Property property) const {
    const Entry& entry = entries_[static_cast<std::size_t>(property)];
    return entry.set ? std::optional(entry.value) : std::nullopt;
  }
  // Keeps the declaration of the highest rank; of equals the later one.
  void offer(Property property, std::string_view value, unsigned long long rank);

 private:
  struct Entry {
    bool set = false;
    unsigned long long rank = 0;
    std::string_view value;
  };
  std::array<Entry, static_cast<std::size_t>(Property::count)> entries_;
};

// Name without its prefix ("svg:path" gives "path").
std::string_view localName(std::string_view name);

// The rules of all <style> elements of a drawing.
class StyleSheet {
 public:
  // Takes the text of one <style> element. Selectors understood: elements, *, .class, #id, their compounds,
  // and descendants and children of those. At-rules and other selectors are kept aside, see unclear().
  // Fails  unsupported  @import, which looks outside the drawing.
  Result<void> add(std::string text);

  // Rules that set one of our properties for a selector, or under a condition, that is not understood.
  const std::vector<std::string>& unclear() const { return unclear_; }

  // Presentation attributes, then rules by specificity and order, then the style attribute, then !important.
  // Source  CSS Cascade; SVG 2, chapter 6 "Styling".
  Declared declaredFor(pugi::xml_node element) const;

 private:
  struct Compound {
    std::string_view element, id;
    std::vector<std::string_view> classes;
    bool child = false;  // its left neighbour must be the parent
  };
  struct Declaration {
    Property property;
    std::string_view value;
    bool important = false;
  };
  struct Rule {
    std::vector<Compound> parts;  // outermost first
    std::vector<Declaration> declarations;
    unsigned specificity = 0;
  };

  static std::vector<Declaration> declarations(std::string_view block);
  static std::optional<Rule> selector(std::string_view text);
  static bool matches(const Compound& compound, pugi::xml_node element);
  static bool matches(const Rule& rule, pugi::xml_node element);
  void addRule(std::string_view selectors, std::string_view block);

  std::deque<std::string> texts_;  // the views point into these
  std::vector<Rule> rules_;
  std::vector<std::string> unclear_;
};

}  // namespace kf::read::svg
