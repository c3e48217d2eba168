// A parsed SVG file with what must be known before its tree is walked; internal to read.
// No units here.
#pragma once

#include <cstddef>
#include <string>
#include <string_view>
#include <unordered_map>
#include <vector>

#include <pugixml.hpp>

#include "core/base/result.h"
#include "core/read/svg_style.h"

namespace kf::read::svg {

inline constexpr int kDeepestElement = 256;

// Owns the tree; nodes, names and values are views into it.
class Document {
 public:
  // Fails  cannotRead   not well-formed (with its line), cut short, no <svg> at the top, nested too deeply.
  //        unsupported  compressed; declares entities (a document type with its own part); looks outside for
  //                     a style sheet.
  Result<void> load(std::string_view bytes, std::string_view name);

  pugi::xml_node root() const { return root_; }
  pugi::xml_node byId(std::string_view id) const;
  const StyleSheet& sheet() const { return sheet_; }

  // The element's name without prefix when it is one of SVG, else "".
  std::string_view kind(pugi::xml_node element) const;
  // "line 12", or the element's id where lines can't be told.
  std::string place(pugi::xml_node element) const;

 private:
  Result<void> checkTop();
  Result<void> index();
  Result<void> take(pugi::xml_node element);
  std::size_t lineAt(std::ptrdiff_t offset) const;
  Error refused(ErrorCode code, std::string_view what) const;

  pugi::xml_document document_;
  pugi::xml_node root_;
  StyleSheet sheet_;
  std::unordered_map<std::string_view, pugi::xml_node> ids_;
  std::vector<std::string_view> prefixes_;  // bound to SVG; "" for names without one
  std::vector<std::size_t> lineStarts_;     // empty when the encoding has more than a byte a line feed
  std::string name_;
};

}  // namespace kf::read::svg
