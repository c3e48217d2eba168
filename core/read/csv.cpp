// Point lists: x and y in columns, joined by lines.
// Lengths in the file's own unit.
#include <algorithm>
#include <array>

#include <fmt/format.h>

#include "core/read/text.h"

namespace kf::read {
namespace {

using curve::Vec2;

struct Dialect {
  char separator = ',';
  bool decimalComma = false;
};

struct Columns {
  std::size_t x = 0, y = 1;
  std::optional<std::size_t> contour;
  std::optional<double> millimetres;  // said by a header such as x_mm
  std::string unit;
};

std::vector<std::string_view> split(std::string_view line, char separator) {
  std::vector<std::string_view> fields;
  for (;;) {
    const std::size_t end = line.find(separator);
    std::string_view field = trimmed(line.substr(0, end));
    if (field.size() >= 2 && field.front() == '"' && field.back() == '"')
      field = trimmed(field.substr(1, field.size() - 2));
    fields.push_back(field);
    if (end == std::string_view::npos) return fields;
    line.remove_prefix(end + 1);
  }
}

// With blanks as the separator, runs of them count once.
std::vector<std::string_view> fieldsOf(std::string_view line, const Dialect& dialect) {
  std::vector<std::string_view> fields = split(trimmed(line), dialect.separator);
  if (dialect.separator == ' ') std::erase_if(fields, [](std::string_view f) { return f.empty(); });
  return fields;
}

std::optional<double> numberIn(std::string_view field, const Dialect& dialect) {
  if (!dialect.decimalComma || field.find(',') == std::string_view::npos) return parseNumber(field);
  if (field.find('.') != std::string_view::npos || field.size() > 60) return std::nullopt;
  std::string text(field);
  std::replace(text.begin(), text.end(), ',', '.');
  return parseNumber(text);
}

class CsvReader {
 public:
  CsvReader(std::string_view bytes, std::string_view name, const ReadOptions& options, RunControl& control)
      : bytes_(bytes), name_(name), options_(options), control_(control) {}

  Result<Drawing> run() {
    drawing_.format = "CSV";
    if (bytes_.substr(0, 3) == "\xEF\xBB\xBF") bytes_.remove_prefix(3);
    std::string_view line;
    while (takeLine(line)) {
      if ((line_ & 4095U) == 0) {
        if (control_.isCancelled()) return Error{ErrorCode::cancelled, "cancelled"};
        control_.report(static_cast<double>(at_) / static_cast<double>(bytes_.size()));
      }
      const std::string_view content = trimmed(line);
      if (!content.empty() && content.front() == '#') continue;
      if (content.empty()) {
        finishContour();
        continue;
      }
      if (auto taken = started_ ? row(content) : begin(content); !taken) return taken.error();
    }
    finishContour();
    if (drawing_.curves.empty())
      return refused(fmt::format("{} holds no two different points; give one x,y pair a line", name_));
    if (columns_.millimetres) {
      drawing_.millimetresPerUnit = columns_.millimetres;
      drawing_.unitName = columns_.unit;
    }
    return std::move(drawing_);
  }

 private:
  Error refused(std::string message) const { return {ErrorCode::cannotRead, std::move(message)}; }
  Error refusedHere(std::string_view what) const {
    return refused(fmt::format("{} line {}: {}", name_, line_, what));
  }

  bool takeLine(std::string_view& text) {
    if (at_ >= bytes_.size()) return false;
    const std::size_t end = std::min(bytes_.find('\n', at_), bytes_.size());
    text = bytes_.substr(at_, end - at_);
    at_ = end + 1;
    ++line_;
    return true;
  }

  // The first line settles the dialect, and whether it is a header.
  Result<void> begin(std::string_view line) {
    started_ = true;
    if (line.find(';') != std::string_view::npos) {
      dialect_ = {';', true};
    } else if (line.find('\t') != std::string_view::npos) {
      dialect_ = {'\t', true};
    } else if (line.find(',') != std::string_view::npos) {
      const auto commas = std::count(line.begin(), line.end(), ',');
      const bool blanks = trimmed(line).find(' ') != std::string_view::npos;
      const bool header = std::any_of(line.begin(), line.end(), [](char c) {
        return (c >= 'a' && c <= 'z' && c != 'e') || (c >= 'A' && c <= 'Z' && c != 'E');
      });
      // "1,5 2,5" and "1,5,2,5" can be read in more than one way.
      if (!header && (commas == 3 || (blanks && commas == 2 && fieldsOf(line, {' ', true}).size() == 2))) {
        return refusedHere(
            "it is unclear whether the comma separates or marks decimals; write decimal points, or separate "
            "by semicolons");
      }
      dialect_ = {',', false};
    } else {
      dialect_ = {' ', false};
    }
    const auto fields = fieldsOf(line, dialect_);
    if (fields.size() >= 2 && numberIn(fields[0], dialect_) && numberIn(fields[1], dialect_))
      return row(line);
    return header(fields);
  }

  Result<void> header(const std::vector<std::string_view>& fields) {
    std::optional<std::size_t> x, y;
    for (std::size_t i = 0; i < fields.size(); ++i) {
      std::string key(fields[i]);
      std::transform(key.begin(), key.end(), key.begin(),
                     [](unsigned char c) { return static_cast<char>(c >= 'A' && c <= 'Z' ? c + 32 : c); });
      if (key == "contour") columns_.contour = i;
      constexpr std::array<std::pair<std::string_view, double>, 3> kinds = {
          {{"", 0.0}, {"_mm", 1.0}, {"_in", 25.4}}};
      for (const auto& [ending, millimetres] : kinds) {
        if (key == "x" + std::string(ending)) x = i;
        if (key == "y" + std::string(ending)) y = i;
        if (millimetres > 0.0 && key == "x" + std::string(ending)) {
          columns_.millimetres = millimetres;
          columns_.unit = ending.substr(1);
        }
      }
    }
    if (!x || !y)
      return refusedHere("the first line is neither two numbers nor a header with columns x and y");
    columns_.x = *x;
    columns_.y = *y;
    return {};
  }

  Result<void> row(std::string_view line) {
    const auto fields = fieldsOf(line, dialect_);
    if (fields.size() <= std::max(columns_.x, columns_.y)) return refusedHere("a row needs an x and a y");
    const auto x = numberIn(fields[columns_.x], dialect_), y = numberIn(fields[columns_.y], dialect_);
    if (!x || !y) {
      return refusedHere(fmt::format("'{}' is not a number",
                                     toUtf8((x ? fields[columns_.y] : fields[columns_.x]).substr(0, 40))));
    }
    if (columns_.contour && fields.size() > *columns_.contour) {
      const std::string label(fields[*columns_.contour]);
      if (label != label_) finishContour();
      label_ = label;
    }
    if (points_ == 0) {
      first_ = {*x, *y};
      firstLine_ = line_;
    } else if (Vec2{*x, *y} == last_) {
      note(drawing_.ignored, "point", "it repeats the point before", fmt::format("line {}", line_));
    } else {
      if (drawing_.curves.size() >= options_.maxCurves)
        return refusedHere(fmt::format("more than {} points", options_.maxCurves));
      drawing_.curves.push_back({curve::Line{last_, {*x, *y}}, "", fmt::format("line {}", line_)});
    }
    last_ = {*x, *y};
    ++points_;
    return {};
  }

  void finishContour() {
    if (points_ == 1) note(drawing_.skipped, "point", "it stands alone", fmt::format("line {}", firstLine_));
    points_ = 0;
  }

  std::string_view bytes_, name_;
  const ReadOptions& options_;
  RunControl& control_;
  Drawing drawing_;
  Dialect dialect_;
  Columns columns_;
  bool started_ = false;
  std::size_t at_ = 0, line_ = 0, points_ = 0, firstLine_ = 0;
  std::string label_;
  Vec2 first_, last_;
};

}  // namespace

Result<Drawing> readCsvPoints(std::string_view bytes, std::string_view name, const ReadOptions& options,
                              RunControl& control) {
  return CsvReader(bytes, name, options, control).run();
}

}  // namespace kf::read
