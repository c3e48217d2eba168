// Parsing an SVG file and refusing what would not be safe or whole.
// No units here.
#include "core/read/svg_document.h"

#include <algorithm>

#include <fmt/format.h>

#include "core/read/svg_scan.h"

namespace kf::read::svg {
namespace {

constexpr std::string_view kSvgSpace = "http://www.w3.org/2000/svg";

std::string textOf(pugi::xml_node element) {
  std::string text;
  for (const pugi::xml_node part : element.children()) {
    if (part.type() == pugi::node_pcdata || part.type() == pugi::node_cdata) text += part.value();
  }
  return text;
}

bool isWide(std::string_view bytes) {
  return bytes.substr(0, 2) == "\xFF\xFE" || bytes.substr(0, 2) == "\xFE\xFF" ||
         bytes.substr(0, 4).find('\0') != std::string_view::npos;
}

}  // namespace

Error Document::refused(ErrorCode code, std::string_view what) const {
  return {code, fmt::format("{} {}", name_, what)};
}

Result<void> Document::load(std::string_view bytes, std::string_view name) {
  name_ = name;
  if (bytes.substr(0, 2) == "\x1F\x8B")
    return refused(ErrorCode::unsupported, "is compressed (gzip); unpack it with gunzip and read the result");
  if (!isWide(bytes)) {
    if (const std::size_t nul = bytes.find('\0'); nul != std::string_view::npos) {
      return refused(ErrorCode::cannotRead,
                     fmt::format("byte {}: holds a zero byte; the file is damaged, get a whole copy", nul));
    }
    lineStarts_.push_back(0);
    for (std::size_t at = bytes.find('\n'); at != std::string_view::npos; at = bytes.find('\n', at + 1))
      lineStarts_.push_back(at + 1);
  }
  const unsigned how = pugi::parse_default | pugi::parse_doctype | pugi::parse_pi;
  const pugi::xml_parse_result result = document_.load_buffer(bytes.data(), bytes.size(), how);
  if (result.status == pugi::status_no_document_element)
    return refused(ErrorCode::cannotRead, "holds no <svg> element; it is cut short or no SVG drawing");
  if (!result) {
    return refused(ErrorCode::cannotRead,
                   fmt::format("line {}: is not well-formed XML ({}); the file is damaged or cut short",
                               lineAt(result.offset), result.description()));
  }
  if (auto top = checkTop(); !top) return top;
  return index();
}

Result<void> Document::checkTop() {
  for (const pugi::xml_node node : document_.children()) {
    const std::string_view value = node.value();
    if (node.type() == pugi::node_doctype && value.find('[') != std::string_view::npos) {
      return refused(ErrorCode::unsupported,
                     "declares entities in its document type, which are not expanded; save it as plain SVG");
    }
    if (node.type() == pugi::node_pi && std::string_view(node.name()) == "xml-stylesheet" &&
        value.find("href=\"#") == std::string_view::npos && value.find("href='#") == std::string_view::npos) {
      return refused(ErrorCode::unsupported,
                     "takes its style from another file (xml-stylesheet); save it with its styles inside");
    }
    if (node.type() != pugi::node_element) continue;
    if (root_)
      return refused(ErrorCode::cannotRead, place(node) + ": has a second element at the top; it is damaged");
    root_ = node;
  }
  for (const pugi::xml_attribute attribute : root_.attributes()) {
    const std::string_view name = attribute.name();
    if (attribute.value() != kSvgSpace) continue;
    if (name.substr(0, 6) == "xmlns:") prefixes_.push_back(name.substr(6));
  }
  const std::string_view plain = root_.attribute("xmlns").as_string();
  if (plain.empty() || plain == kSvgSpace) prefixes_.emplace_back();
  if (kind(root_) != "svg") {
    return refused(ErrorCode::cannotRead,
                   fmt::format("begins with <{}> instead of <svg>; it is no SVG drawing", root_.name()));
  }
  return {};
}

Result<void> Document::index() {
  pugi::xml_node at = root_;
  for (int depth = 0;;) {
    if (auto taken = take(at); !taken) return taken;
    if (at.first_child()) {
      at = at.first_child();
      if (++depth > kDeepestElement) {
        return refused(ErrorCode::cannotRead,
                       fmt::format("{}: nests elements more than {} deep; ungroup them", place(at.parent()),
                                   kDeepestElement));
      }
      continue;
    }
    while (at != root_ && !at.next_sibling()) {
      at = at.parent();
      --depth;
    }
    if (at == root_) return {};
    at = at.next_sibling();
  }
}

Result<void> Document::take(pugi::xml_node element) {
  if (element.type() != pugi::node_element) return {};
  const std::string_view id = element.attribute("id").as_string();
  if (!id.empty()) ids_.emplace(id, element);
  if (kind(element) != "style") return {};
  const std::string_view type = element.attribute("type").as_string();
  if (!type.empty() && type != "text/css") return {};
  if (auto added = sheet_.add(textOf(element)); !added)
    return refused(added.error().code, place(element) + ": " + added.error().message);
  return {};
}

pugi::xml_node Document::byId(std::string_view id) const {
  const auto found = ids_.find(id);
  return found == ids_.end() ? pugi::xml_node() : found->second;
}

std::string_view Document::kind(pugi::xml_node element) const {
  const std::string_view name = element.name();
  const std::size_t colon = name.find(':');
  const std::string_view prefix =
      colon == std::string_view::npos ? std::string_view() : name.substr(0, colon);
  const bool known = std::find(prefixes_.begin(), prefixes_.end(), prefix) != prefixes_.end();
  if (known) return localName(name);
  const std::string own = prefix.empty() ? "xmlns" : "xmlns:" + std::string(prefix);
  return element.attribute(own.c_str()).as_string() == kSvgSpace ? localName(name) : std::string_view();
}

std::size_t Document::lineAt(std::ptrdiff_t offset) const {
  const auto after = std::upper_bound(lineStarts_.begin(), lineStarts_.end(),
                                      static_cast<std::size_t>(std::max<std::ptrdiff_t>(offset, 0)));
  return static_cast<std::size_t>(after - lineStarts_.begin());
}

std::string Document::place(pugi::xml_node element) const {
  if (!lineStarts_.empty()) return fmt::format("line {}", lineAt(element.offset_debug()));
  const std::string_view id = element.attribute("id").as_string();
  return id.empty() ? fmt::format("a <{}>", element.name()) : fmt::format("id {}", id);
}

}  // namespace kf::read::svg
