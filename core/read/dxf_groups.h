// The group pairs of a DXF text file, one entity at a time; internal to read.
// No units here.
#pragma once

#include <cstddef>
#include <cstdint>
#include <optional>
#include <string>
#include <string_view>
#include <vector>

#include "core/base/result.h"

namespace kf::read {

struct Group {
  int code = 0;
  std::string_view value;
  std::size_t line = 0;  // of the value
};

// Reads pairs of lines: a group code, and its value. Copes with \n and \r\n.
class GroupStream {
 public:
  GroupStream(std::string_view bytes, std::string_view name) : bytes_(bytes), name_(name) {}

  // The next pair, or empty at the end of the input. Comments (group 999) are passed over.
  // Fails  cannotRead  a group code that is no whole number, or a code without its value.
  Result<std::optional<Group>> next();

  std::size_t line() const { return line_; }
  double progress() const {
    return bytes_.empty() ? 1.0 : static_cast<double>(at_) / static_cast<double>(bytes_.size());
  }

 private:
  bool takeLine(std::string_view& text);

  std::string_view bytes_, name_;
  std::size_t at_ = 0, line_ = 0;
};

// All groups of one record: the pairs from one group 0 to the next.
struct Record {
  std::string_view type;
  std::size_t line = 0;
  std::vector<Group> groups;

  const Group* find(int code) const;
  std::string place() const;  // "line 12"
};

// A number of a record; `fallback` when it has no such group.
// Fails  cannotRead  it has one, and it is not a finite number.
Result<double> number(const Record& record, int code, double fallback, std::string_view name);
Result<long long> integer(const Record& record, int code, long long fallback, std::string_view name);
Result<double> numberOf(const Group& group, std::string_view name);

}  // namespace kf::read
