// The group pairs of a DXF file, text or binary, one entity at a time; internal to read.
// No units here.
#pragma once

#include <bit>
#include <cstddef>
#include <cstdint>
#include <optional>
#include <string>
#include <string_view>
#include <vector>

#include "core/base/result.h"

namespace kf::read {

// A group code with its value. A text file gives every value as text; a binary one gives numbers as such.
struct Group {
  enum class Kind : std::uint8_t { text, real, whole };

  std::int16_t code = 0;
  Kind kind = Kind::text;
  bool binary = false;
  std::string_view value;  // of text
  std::uint64_t bits = 0;  // of a binary number
  std::size_t at = 0;      // line of the value in a text file, byte in a binary one

  double real() const { return std::bit_cast<double>(bits); }
  std::int64_t whole() const { return std::bit_cast<std::int64_t>(bits); }

  std::string place() const;  // "line 12" or "byte 812"
  std::string shown() const;  // the value for a message, cut to 40 characters
};

// Reads pairs: two lines each in a text file (\n or \r\n), a code of one or two bytes and a value of a size
// that the code tells in a binary one. Nothing in the file decides how much is set aside.
class GroupStream {
 public:
  GroupStream(std::string_view bytes, std::string_view name);

  // Puts the next pair into `group`; false at the end of the input. Comments (group 999) are passed over.
  // Fails  cannotRead  a group code that is no whole number or is not known, or a code without its value.
  Result<bool> next(Group& group) { return binary_ ? nextBinary(group) : nextText(group); }

  std::string place() const;
  double progress() const {
    return bytes_.empty() ? 1.0 : static_cast<double>(at_) / static_cast<double>(bytes_.size());
  }

 private:
  bool takeLine(std::string_view& text);
  Result<bool> nextText(Group& group);
  Result<bool> nextBinary(Group& group);
  std::optional<std::uint64_t> takeBytes(std::size_t count);
  bool takeValue(Group& group);
  Error cutShort() const;

  std::string_view bytes_, name_;
  std::size_t at_ = 0, line_ = 0;
  bool binary_ = false, wideCodes_ = true;
};

// True for the 22 bytes that begin a binary DXF file.
bool isBinaryDxf(std::string_view bytes);

// All groups of one record: the pairs from one group 0 to the next.
struct Record {
  Group head;             // the group 0
  std::string_view type;  // its value without blanks
  std::vector<Group> groups;

  const Group* find(int code) const;
  std::string place() const { return head.place(); }
};

// A number of a record; `fallback` when it has no such group.
// Fails  cannotRead  it has one, and it is not a finite number.
Result<double> number(const Record& record, int code, double fallback, std::string_view name);
Result<long long> integer(const Record& record, int code, long long fallback, std::string_view name);
Result<double> numberOf(const Group& group, std::string_view name);
Result<long long> integerOf(const Group& group, std::string_view name);

}  // namespace kf::read
