// Completeness of STEP and IGES files by their text.
// No units here.
#include "core/read/brep_frame.h"

#include <algorithm>
#include <array>
#include <optional>
#include <string>
#include <unordered_map>
#include <utility>
#include <vector>

#include <fmt/format.h>

#include "core/read/text.h"

namespace kf::read {
namespace {

Error damaged(std::string_view name, std::size_t line, std::string_view what) {
  return {ErrorCode::cannotRead, fmt::format("{} line {}: {}; get a whole copy", name, line, what)};
}

bool isWordCharacter(char c) {
  return (c >= 'a' && c <= 'z') || (c >= 'A' && c <= 'Z') || (c >= '0' && c <= '9') || c == '_' || c == '-';
}

// One pass over the tokens of ISO 10303-21.
class StepFrame {
 public:
  StepFrame(std::string_view bytes, std::string_view name) : bytes_(bytes), name_(name) {}

  Result<void> run() {
    for (;;) {
      if (auto blanks = skipBlanks(); !blanks) return blanks;
      if (at_ >= bytes_.size()) break;
      if (auto taken = token(); !taken) return taken;
    }
    if (!ended_) return damaged(name_, line_, "it ends without END-ISO-10303-21; and is cut short");
    return checkReferences();
  }

 private:
  Result<void> checkReferences() const {
    std::pair<std::size_t, long long> first{line_ + 1, 0};  // the one that stands first
    for (const auto& [number, line] : used_) {
      if (!defined_.contains(number)) first = std::min(first, {line, number});
    }
    if (first.first > line_) return {};
    return damaged(name_, first.first, fmt::format("#{} is used but nowhere defined", first.second));
  }

  Result<void> skipBlanks() {
    while (at_ < bytes_.size()) {
      const char c = bytes_[at_];
      if (c == '\n') ++line_;
      if (c == ' ' || c == '\t' || c == '\r' || c == '\n' || c == '\f' || c == '\v') {
        ++at_;
      } else if (bytes_.substr(at_, 2) == "/*") {
        const std::size_t end = bytes_.find("*/", at_ + 2);
        if (end == std::string_view::npos)
          return damaged(name_, line_, "a comment that begins here has no end");
        for (; at_ < end + 2; ++at_) line_ += bytes_[at_] == '\n' ? 1U : 0U;
      } else {
        return {};
      }
    }
    return {};
  }

  Result<void> token() {
    const char c = bytes_[at_];
    if (ended_) return damaged(name_, line_, "something follows END-ISO-10303-21;");
    if (c == '\'' || c == '"') return text(c);
    if (c == '#') return instance();
    if (c == '(' || c == ')' || c == ';' || c == '=') return mark(c);
    if (isWordCharacter(c)) {
      const std::size_t from = at_;
      while (at_ < bytes_.size() && isWordCharacter(bytes_[at_])) ++at_;
      if (fresh_ && depth_ == 0) word(bytes_.substr(from, at_ - from));
      fresh_ = false;
      if (first_ && word_ != "ISO-10303-21")
        return damaged(name_, line_, "it does not begin with ISO-10303-21;");
      first_ = false;
      return {};
    }
    if (static_cast<unsigned char>(c) < 0x20) return damaged(name_, line_, "it holds a control character");
    ++at_;
    fresh_ = false;
    return {};
  }

  void word(std::string_view text) { word_ = text; }

  Result<void> text(char quote) {
    const std::size_t from = line_;
    for (++at_; at_ < bytes_.size() && bytes_[at_] != quote; ++at_) line_ += bytes_[at_] == '\n' ? 1U : 0U;
    if (at_ >= bytes_.size()) return damaged(name_, from, "a text that begins here has no end");
    ++at_;
    fresh_ = false;
    return {};
  }

  Result<void> instance() {
    const bool defines = fresh_ && depth_ == 0;
    const std::size_t from = ++at_;
    while (at_ < bytes_.size() && bytes_[at_] >= '0' && bytes_[at_] <= '9') ++at_;
    const auto number = parseInteger(bytes_.substr(from, at_ - from));
    if (!number) return damaged(name_, line_, "a # without its number");
    fresh_ = false;
    if (!defines) {
      used_.emplace(*number, line_);
    } else if (!defined_.emplace(*number, line_).second) {
      return damaged(name_, line_, fmt::format("#{} is defined a second time", *number));
    }
    return {};
  }

  Result<void> mark(char c) {
    ++at_;
    if (c == '(') ++depth_;
    if (c == ')' && depth_-- == 0) return damaged(name_, line_, "a bracket closes that was not opened");
    if (c != ';') {
      fresh_ = false;
      return {};
    }
    if (depth_ != 0) return damaged(name_, line_, "a statement ends inside a bracket");
    auto moved = endStatement();
    fresh_ = true;
    word_ = {};
    return moved;
  }

  Result<void> endStatement() {
    if (word_ == "HEADER" || word_ == "DATA" || word_ == "ANCHOR" || word_ == "REFERENCE") {
      if (open_) return damaged(name_, line_, "a section begins inside another");
      open_ = true;
      hasData_ = hasData_ || word_ == "DATA";
    } else if (word_ == "ENDSEC") {
      if (!open_) return damaged(name_, line_, "ENDSEC without its section");
      open_ = false;
    } else if (word_ == "END-ISO-10303-21") {
      if (open_ || !hasData_) return damaged(name_, line_, "it ends inside a section or has no DATA section");
      ended_ = true;
    }
    return {};
  }

  std::string_view bytes_, name_, word_;
  std::size_t at_ = 0, line_ = 1, depth_ = 0;
  bool first_ = true, fresh_ = true, open_ = false, hasData_ = false, ended_ = false;
  std::unordered_map<long long, std::size_t> used_, defined_;  // number to line
};

struct IgesLine {
  std::string_view text;
  char section = ' ';
};

// Columns from..to (1-based, inclusive) as a whole number.
std::optional<long long> field(std::string_view line, std::size_t from, std::size_t to) {
  return parseInteger(line.substr(from - 1, to - from + 1));
}

Result<std::vector<IgesLine>> igesLines(std::string_view bytes, std::string_view name) {
  std::vector<IgesLine> lines;
  std::array<long long, 256> last{};
  constexpr std::string_view kOrder = "SGDPT";
  std::size_t stage = 0;
  for (std::size_t number = 1; !bytes.empty(); ++number) {
    const std::size_t end = bytes.find('\n');
    std::string_view line = bytes.substr(0, end);
    bytes.remove_prefix(end == std::string_view::npos ? bytes.size() : end + 1);
    if (!line.empty() && line.back() == '\r') line.remove_suffix(1);
    if (trimmed(line).empty() && bytes.find_first_not_of(" \r\n") == std::string_view::npos) break;
    if (line.size() != 80)
      return damaged(name, number, fmt::format("it has {} columns instead of the 80 of IGES", line.size()));
    const char section = line[72];
    if (number == 1 && (section == 'C' || section == 'B')) {
      return Error{ErrorCode::unsupported,
                   fmt::format("{} is IGES in its {} form, which is not read; export the plain one", name,
                               section == 'C' ? "compressed" : "binary")};
    }
    const std::size_t found = kOrder.find(section);
    if (found == std::string_view::npos || found < stage)
      return damaged(name, number,
                     fmt::format("column 73 holds \"{}\" where S, G, D, P or T should follow", section));
    stage = found;
    long long& before = last[static_cast<unsigned char>(section)];
    const auto sequence = field(line, 74, 80);
    if (!sequence || *sequence != before + 1)
      return damaged(name, number, fmt::format("its number is not {} as it should be", before + 1));
    before = *sequence;
    lines.push_back({line, section});
  }
  return lines;
}

Result<void> checkTerminate(const std::vector<IgesLine>& lines, std::string_view name) {
  if (lines.empty() || lines.back().section != 'T')
    return damaged(name, lines.size(), "it ends without the terminate record and is cut short");
  const std::string_view last = lines.back().text;
  for (std::size_t i = 0; i < 4; ++i) {
    const char letter = "SGDP"[i];
    long long count = 0;
    for (const IgesLine& line : lines) count += line.section == letter ? 1 : 0;
    const auto stated = field(last, 8 * i + 2, 8 * i + 8);
    if (last[8 * i] != letter || !stated || *stated != count) {
      return damaged(
          name, lines.size(),
          fmt::format("the terminate record does not count the {} lines of section {}", count, letter));
    }
  }
  return {};
}

// Field 2 of each directory entry is its first parameter line, field 14 their number; the parameter lines
// name the entry in columns 66 to 72. Source: IGES 5.3, 2.2.4.4 and 2.2.4.5.
Result<void> checkDirectory(const std::vector<IgesLine>& lines, std::string_view name) {
  std::vector<std::size_t> directory, parameters;
  for (std::size_t i = 0; i < lines.size(); ++i) {
    if (lines[i].section == 'D') directory.push_back(i);
    if (lines[i].section == 'P') parameters.push_back(i);
  }
  if (directory.size() % 2 != 0)
    return damaged(name, directory.back() + 1, "a directory entry has only one of its two lines");
  std::size_t claimed = 0;
  for (std::size_t i = 0; i < directory.size(); i += 2) {
    const std::size_t at = directory[i] + 1;
    const auto first = field(lines[directory[i]].text, 9, 16),
               count = field(lines[directory[i + 1]].text, 25, 32);
    const auto size = static_cast<long long>(parameters.size());
    if (!first || !count || *first < 1 || *count < 1 || *count > size || *first > size - *count + 1)
      return damaged(name, at, "a directory entry points at parameter lines that are not there");
    for (long long j = *first; j < *first + *count; ++j) {
      const std::size_t row = parameters[static_cast<std::size_t>(j - 1)];
      const auto back = field(lines[row].text, 66, 72);
      if (!back || *back != static_cast<long long>(i) + 1)
        return damaged(name, row + 1, "a parameter line does not point back at its directory entry");
    }
    claimed += static_cast<std::size_t>(*count);
  }
  if (claimed != parameters.size())
    return damaged(name, lines.size(), "some parameter lines belong to no directory entry");
  return {};
}

}  // namespace

Result<void> checkStepFrame(std::string_view bytes, std::string_view name) {
  return StepFrame(bytes, name).run();
}

Result<void> checkIgesFrame(std::string_view bytes, std::string_view name) {
  auto lines = igesLines(bytes, name);
  if (!lines) return lines.error();
  if (auto whole = checkTerminate(*lines, name); !whole) return whole;
  return checkDirectory(*lines, name);
}

}  // namespace kf::read
