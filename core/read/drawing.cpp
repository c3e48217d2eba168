// Which reader a file needs, by its content and its ending.
// No units here.
#include "core/read/drawing.h"

#include <algorithm>
#include <array>
#include <filesystem>
#include <fstream>
#include <iostream>
#include <iterator>

#include <fmt/format.h>

#include "core/read/dxf_groups.h"
#include "core/read/text.h"

namespace kf::read {
namespace {

using Reader = Result<Drawing> (*)(std::string_view, std::string_view, const ReadOptions&, RunControl&);

struct Format {
  std::string_view name, ending;
  bool (*matches)(std::string_view bytes);
  Reader read;
};

// A DXF text file begins with group 0 (or a comment, 999), and names a section early.
bool looksLikeDxf(std::string_view bytes) {
  if (isBinaryDxf(bytes)) return true;
  const std::string_view head = trimmed(bytes.substr(0, std::min<std::size_t>(bytes.find('\n'), 20)));
  return (head == "0" || head == "999") && bytes.substr(0, 65536).find("SECTION") != std::string_view::npos;
}

// XML whose first element is <svg>, perhaps with a prefix.
bool looksLikeSvg(std::string_view bytes) {
  if (bytes.substr(0, 3) == "\xEF\xBB\xBF") bytes.remove_prefix(3);
  const std::size_t first = bytes.find_first_not_of(" \t\r\n");
  if (first == std::string_view::npos || bytes[first] != '<') return false;
  const std::string_view head = bytes.substr(first, 65536);
  return head.find("<svg") != std::string_view::npos || head.find(":svg") != std::string_view::npos;
}

bool looksLikeStep(std::string_view bytes) {
  const std::size_t first = bytes.find_first_not_of(" \t\r\n");
  return first != std::string_view::npos && bytes.substr(first, 13) == "ISO-10303-21;";
}

// Lines of 80 columns, numbered in the last seven, the first of them of section S.
bool looksLikeIges(std::string_view bytes) {
  const std::size_t end = bytes.find_first_of("\r\n");
  return end == 80 && bytes[72] == 'S' &&
         trimmed(bytes.substr(73, 7)).find_first_not_of("01") == std::string_view::npos;
}

bool looksLikeRows(std::string_view bytes) {
  return bytes.substr(0, 4096).find('\0') == std::string_view::npos;
}

// Content decides first, in this order; the ending decides between texts that look alike.
constexpr std::array<Format, 5> kFormats = {{
    {"DXF", ".dxf", looksLikeDxf, readDxf},
    {"SVG", ".svg", looksLikeSvg, readSvg},
    {"STEP", ".step", looksLikeStep, readStep},
    {"IGES", ".iges", looksLikeIges, readIges},
    {"CSV", ".csv", looksLikeRows, readCsvPoints},
}};

std::string lowerEnding(const std::string& path) {
  std::string ending = std::filesystem::path(path).extension().string();
  std::transform(ending.begin(), ending.end(), ending.begin(),
                 [](unsigned char c) { return static_cast<char>(c >= 'A' && c <= 'Z' ? c + 32 : c); });
  if (ending == ".svgz") return ".svg";
  if (ending == ".stp" || ending == ".p21") return ".step";
  if (ending == ".igs") return ".iges";
  return ending == ".txt" || ending == ".xy" ? ".csv" : ending;
}

}  // namespace

Result<std::string> readBytes(const std::string& path, std::size_t maxBytes) {
  const auto refused = [&path](std::string_view what) {
    return Error{ErrorCode::cannotRead, fmt::format("{} {}", path == "-" ? "standard input" : path, what)};
  };
  std::string bytes;
  const auto take = [&](std::istream& in) -> Result<std::string> {
    std::string block(1U << 20, '\0');
    while (in) {
      in.read(block.data(), static_cast<std::streamsize>(block.size()));
      bytes.append(block, 0, static_cast<std::size_t>(in.gcount()));
      if (bytes.size() > maxBytes)
        return refused(fmt::format("is larger than {} MiB; split it", maxBytes >> 20U));
    }
    if (in.bad()) return refused("can't be read to its end; check the disk or the connection");
    return std::move(bytes);
  };
  if (path == "-") return take(std::cin);
  std::error_code failure;
  if (std::filesystem::is_directory(path, failure)) return refused("is a folder; name a drawing");
  std::ifstream file(path, std::ios::binary);
  if (!file) return refused("can't be opened; check the name and that it may be read");
  return take(file);
}

Result<Drawing> readDrawingBytes(std::string_view bytes, const std::string& path, const ReadOptions& options,
                                 RunControl& control) {
  const std::string name = path == "-" ? "standard input" : std::filesystem::path(path).filename().string();
  if (trimmed(bytes).find_first_not_of(" \t\r\n") == std::string_view::npos) {
    return Error{ErrorCode::cannotRead, fmt::format("{} is empty; get a whole copy", name)};
  }
  const std::string ending = lowerEnding(path);
  for (const Format& format : kFormats) {
    if (ending == format.ending) return format.read(bytes, name, options, control);
  }
  for (const Format& format : kFormats) {
    if (format.matches(bytes) && (path == "-" || ending.empty() || format.read != readCsvPoints))
      return format.read(bytes, name, options, control);
  }
  return Error{
      ErrorCode::unsupported,
      fmt::format(
          "{} is of a kind that is not read; DXF, SVG, STEP and IGES drawings and CSV point lists are",
          name)};
}

Result<Drawing> readDrawing(const std::string& path, const ReadOptions& options, RunControl& control) {
  auto bytes = readBytes(path, options.maxBytes);
  if (!bytes) return bytes.error();
  return readDrawingBytes(*bytes, path, options, control);
}

}  // namespace kf::read
