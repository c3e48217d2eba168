// Point lists: x and y in columns, joined by lines.
// Lengths in the file's own unit.
#include <algorithm>
#include <array>
#include <cmath>

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
  std::size_t x = 0, y = 1, count = 0;  // count 0: not known yet
  std::optional<std::size_t> contour;
  std::optional<double> millimetres;  // said by a header such as x_mm
  std::string unit;
};

// With blanks as the separator, runs of them count once.
void splitInto(std::vector<std::string_view>& fields, std::string_view line, char separator) {
  fields.clear();
  for (;;) {
    const std::size_t end = line.find(separator);
    std::string_view field = trimmed(line.substr(0, end));
    if (field.size() >= 2 && field.front() == '"' && field.back() == '"')
      field = trimmed(field.substr(1, field.size() - 2));
    if (separator != ' ' || !field.empty()) fields.push_back(field);
    if (end == std::string_view::npos) return;
    line.remove_prefix(end + 1);
  }
}

bool hasLetters(std::string_view line) {
  return std::any_of(line.begin(), line.end(), [](char c) {
    return (c >= 'a' && c <= 'z' && c != 'e') || (c >= 'A' && c <= 'Z' && c != 'E');
  });
}

// "x_mm", "X [mm]" and "x (mm)" are the same key: "x_mm".
std::string keyOf(std::string_view field) {
  std::string key;
  for (char c : lowerCase(field)) {
    if (c == ' ' || c == '[' || c == '(') c = '_';
    if (c == ']' || c == ')' || (c == '_' && !key.empty() && key.back() == '_')) continue;
    key += c;
  }
  return key;
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
      if (content.empty()) {
        finishContour();
        continue;
      }
      auto taken = content.front() == '#' ? comment(content) : started_ ? row(content) : begin(content);
      if (!taken) return taken.error();
    }
    finishContour();
    if (auto whole = checkWhole(); !whole) return whole.error();
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
  Error unclear(std::string_view where) const {
    return refused(
        fmt::format("{}{}: it is unclear whether the comma separates or marks decimals; write decimal "
                    "points, or separate by semicolons",
                    name_, where));
  }

  bool takeLine(std::string_view& text) {
    if (at_ >= bytes_.size()) return false;
    const std::size_t end = std::min(bytes_.find('\n', at_), bytes_.size());
    text = bytes_.substr(at_, end - at_);
    at_ = end + 1;
    ++line_;
    return true;
  }

  // "# points 180" says how many rows follow, so that a file that is cut short can be told.
  Result<void> comment(std::string_view line) {
    constexpr std::string_view word = "# points ";
    if (line.substr(0, word.size()) != word) return {};
    const auto count = parseInteger(line.substr(word.size()));
    if (!count || *count < 0) return refusedHere("'# points' must be followed by the number of rows");
    promised_ = static_cast<std::size_t>(*count);
    return {};
  }

  Result<void> checkWhole() const {
    if (promised_ && (rows_ != *promised_ || bytes_.back() != '\n')) {
      return refused(fmt::format("{} ends at line {} with {} points, although it says {}; get a whole copy",
                                 name_, line_, rows_, *promised_));
    }
    if (drawing_.curves.empty())
      return refused(fmt::format("{} holds no two different points; give one x,y pair a line", name_));
    // "0,5,1" may be three whole numbers, or two of which one has a decimal comma.
    const bool bare = dialect_.separator == ',' && !header_ && !seenPoint_;
    if (bare && columns_.count > 2) return unclear("");
    return {};
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
      splitInto(fields_, line, ' ');
      // "1,5 2,5" and "1,5,2,5" can be read in more than one way.
      if (!hasLetters(line) &&
          ((commas == 3 && line.find('.') == std::string_view::npos) || (commas == 2 && fields_.size() == 2)))
        return unclear(fmt::format(" line {}", line_));
      dialect_ = {',', false};
    } else {
      dialect_ = {' ', false};
    }
    splitInto(fields_, line, dialect_.separator);
    columns_.count = fields_.size();
    if (fields_.size() >= 2 && number(fields_[0]) && number(fields_[1])) {
      if (columns_.count > 2)
        note(drawing_.ignored, "column",
             "only the first two columns are read, as x and y; give a header to choose",
             fmt::format("line {}", line_));
      return row(line);
    }
    return header();
  }

  Result<void> header() {
    header_ = true;
    std::optional<std::size_t> x, y;
    std::string_view unitX, unitY;
    for (std::size_t i = 0; i < fields_.size(); ++i) {
      const std::string key = keyOf(fields_[i]);
      if (key == "contour") columns_.contour = i;
      for (std::string_view unit : {"", "mm", "in"}) {
        const std::string ending = unit.empty() ? "" : "_" + std::string(unit);
        if (key == "x" + ending) {
          x = i;
          unitX = unit;
        }
        if (key == "y" + ending) {
          y = i;
          unitY = unit;
        }
      }
    }
    if (!x || !y)
      return refusedHere("the first line is neither two numbers nor a header with columns x and y");
    if (unitX != unitY) return refusedHere("the columns x and y are in different units; convert one of them");
    if (!unitX.empty()) columns_.millimetres = unitX == "mm" ? 1.0 : 25.4;
    columns_.unit = unitX;
    columns_.x = *x;
    columns_.y = *y;
    return {};
  }

  std::optional<double> number(std::string_view field) {
    if (field.find('.') != std::string_view::npos) seenPoint_ = true;
    if (!dialect_.decimalComma || field.find(',') == std::string_view::npos) return parseNumber(field);
    seenComma_ = true;
    if (field.find('.') != std::string_view::npos || field.size() > 60) return std::nullopt;
    std::array<char, 60> text{};
    std::replace_copy(field.begin(), field.end(), text.begin(), ',', '.');
    return parseNumber({text.data(), field.size()});
  }

  Result<void> row(std::string_view line) {
    splitInto(fields_, line, dialect_.separator);
    if (fields_.size() <= std::max(columns_.x, columns_.y)) return refusedHere("a row needs an x and a y");
    if (fields_.size() != columns_.count) {
      return refusedHere(
          fmt::format("{} columns, where the first line has {}; give each row the same, with decimal "
                      "points where commas separate",
                      fields_.size(), columns_.count));
    }
    const auto x = number(fields_[columns_.x]), y = number(fields_[columns_.y]);
    if (!x || !y) {
      return refusedHere(fmt::format("'{}' is not a number",
                                     toUtf8((x ? fields_[columns_.y] : fields_[columns_.x]).substr(0, 40))));
    }
    if (seenComma_ && seenPoint_)
      return refusedHere("decimal points and decimal commas are mixed; use one of them");
    if (columns_.contour && fields_[*columns_.contour] != label_) {
      finishContour();
      label_ = fields_[*columns_.contour];
    }
    ++rows_;
    return add({*x, *y});
  }

  Result<void> add(Vec2 point) {
    if (std::abs(point.x) > kLargestCoordinate || std::abs(point.y) > kLargestCoordinate)
      return refusedHere("a coordinate is out of range");
    if (points_ == 0) {
      firstLine_ = line_;
    } else if (point == last_) {
      note(drawing_.ignored, "point", "it repeats the point before", fmt::format("line {}", line_));
    } else {
      if (drawing_.curves.size() >= options_.maxCurves)
        return refusedHere(fmt::format("more than {} points; split the file", options_.maxCurves));
      drawing_.curves.push_back(
          {curve::Line{last_, point}, "", fmt::format("line {}", line_), piecesInContour_ > 0});
      ++piecesInContour_;
    }
    last_ = point;
    ++points_;
    return {};
  }

  void finishContour() {
    if (points_ == 1) note(drawing_.skipped, "point", "it stands alone", fmt::format("line {}", firstLine_));
    points_ = piecesInContour_ = 0;
  }

  // Coordinates beyond this can't be told apart to 1e-4 any more.
  static constexpr double kLargestCoordinate = 1e12;

  std::string_view bytes_, name_;
  const ReadOptions& options_;
  RunControl& control_;
  Drawing drawing_;
  Dialect dialect_;
  Columns columns_;
  std::vector<std::string_view> fields_;
  std::optional<std::size_t> promised_;
  bool started_ = false, header_ = false, seenPoint_ = false, seenComma_ = false;
  std::size_t at_ = 0, line_ = 0, rows_ = 0, points_ = 0, piecesInContour_ = 0, firstLine_ = 0;
  std::string_view label_;
  Vec2 last_;
};

}  // namespace

Result<Drawing> readCsvPoints(std::string_view bytes, std::string_view name, const ReadOptions& options,
                              RunControl& control) {
  return CsvReader(bytes, name, options, control).run();
}

}  // namespace kf::read
