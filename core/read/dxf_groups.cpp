// The group pairs of a DXF file, text or binary.
// No units here.
#include "core/read/dxf_groups.h"

#include <algorithm>
#include <array>
#include <bit>
#include <cstring>

#include <fmt/format.h>

#include "core/read/text.h"

namespace kf::read {
namespace {

using namespace std::string_view_literals;

// What begins a binary file. Source: the public DXF reference.
constexpr std::string_view kSentinel = "AutoCAD Binary DXF\r\n\x1a\0"sv;

enum class Stored : std::uint8_t { unknown, text, chunk, real, byte, short16, long32, long64 };

struct CodeRange {
  int first, last;
  Stored stored;
};

// How the value of each group code is stored. Source: the public DXF reference, group code value types.
constexpr std::array<CodeRange, 31> kStored = {{
    {0, 9, Stored::text},         {10, 59, Stored::real},      {60, 79, Stored::short16},
    {90, 99, Stored::long32},     {100, 102, Stored::text},    {105, 105, Stored::text},
    {110, 149, Stored::real},     {160, 169, Stored::long64},  {170, 179, Stored::short16},
    {210, 239, Stored::real},     {270, 289, Stored::short16}, {290, 299, Stored::byte},
    {300, 309, Stored::text},     {310, 319, Stored::chunk},   {320, 369, Stored::text},
    {370, 389, Stored::short16},  {390, 399, Stored::text},    {400, 409, Stored::short16},
    {410, 419, Stored::text},     {420, 429, Stored::long32},  {430, 439, Stored::text},
    {440, 459, Stored::long32},   {460, 469, Stored::real},    {470, 481, Stored::text},
    {999, 999, Stored::text},     {1000, 1003, Stored::text},  {1004, 1004, Stored::chunk},
    {1005, 1009, Stored::text},   {1010, 1059, Stored::real},  {1060, 1070, Stored::short16},
    {1071, 1071, Stored::long32},
}};

Stored storedAs(int code) {
  for (const CodeRange& range : kStored) {
    if (code >= range.first && code <= range.last) return range.stored;
  }
  return Stored::unknown;
}

}  // namespace

bool isBinaryDxf(std::string_view bytes) {
  return bytes.substr(0, kSentinel.size()) == kSentinel;
}

std::string Group::place() const {
  return fmt::format("{} {}", binary ? "byte" : "line", at);
}

std::string Group::shown() const {
  if (kind == Kind::real) return fmt::format("{}", real());
  if (kind == Kind::whole) return fmt::format("{}", whole());
  return toUtf8(value.substr(0, 40));
}

// A two-byte code begins the first group, 0, with two zero bytes; a one-byte code (the oldest files) with
// one.
GroupStream::GroupStream(std::string_view bytes, std::string_view name) : bytes_(bytes), name_(name) {
  if (bytes_.substr(0, 3) == "\xEF\xBB\xBF") bytes_.remove_prefix(3);
  binary_ = isBinaryDxf(bytes_);
  if (!binary_) return;
  at_ = kSentinel.size();
  wideCodes_ = at_ + 1 < bytes_.size() && bytes_[at_ + 1] == '\0';
}

std::string GroupStream::place() const {
  return binary_ ? fmt::format("byte {}", at_) : fmt::format("line {}", line_);
}

Error GroupStream::cutShort() const {
  return {ErrorCode::cannotRead,
          fmt::format("{} ends at {} in the middle of a group; the file is cut short, get a whole copy",
                      name_, place())};
}

bool GroupStream::takeLine(std::string_view& text) {
  if (at_ >= bytes_.size()) return false;
  const char* from = bytes_.data() + at_;
  const void* found = std::memchr(from, '\n', bytes_.size() - at_);
  const std::size_t length = found == nullptr
                                 ? bytes_.size() - at_
                                 : static_cast<std::size_t>(static_cast<const char*>(found) - from);
  text = bytes_.substr(at_, length);
  at_ += length + (found == nullptr ? 0 : 1);
  ++line_;
  if (!text.empty() && text.back() == '\r') text.remove_suffix(1);
  return true;
}

Result<bool> GroupStream::nextText(Group& group) {
  for (;;) {
    std::string_view code;
    if (!takeLine(code)) return false;
    const auto parsed = parseInteger(code);
    if (!parsed || *parsed < -5 || *parsed > 1071) {
      // Blank lines at the very end do no harm.
      if (trimmed(code).empty() && bytes_.find_first_not_of("\r\n\t ", at_) == std::string_view::npos) {
        at_ = bytes_.size();
        return false;
      }
      return Error{
          ErrorCode::cannotRead,
          fmt::format("{} line {}: '{}' is not a DXF group code; the file is damaged or not DXF text", name_,
                      line_, toUtf8(code.substr(0, 40)))};
    }
    if (!takeLine(group.value)) return cutShort();
    group.code = static_cast<std::int16_t>(*parsed);
    group.at = line_;
    if (group.code != 999) return true;
  }
}

// Little-endian.
std::optional<std::uint64_t> GroupStream::takeBytes(std::size_t count) {
  if (bytes_.size() - at_ < count) return std::nullopt;
  std::uint64_t value = 0;
  for (std::size_t i = 0; i < count; ++i)
    value |= static_cast<std::uint64_t>(static_cast<unsigned char>(bytes_[at_ + i])) << (8 * i);
  at_ += count;
  return value;
}

bool GroupStream::takeValue(Group& group) {
  const Stored stored = storedAs(group.code);
  if (stored == Stored::text) {
    const std::size_t end = bytes_.find('\0', at_);
    if (end == std::string_view::npos) return false;
    group.value = bytes_.substr(at_, end - at_);
    at_ = end + 1;
    return true;
  }
  if (stored == Stored::chunk) {
    const auto size = takeBytes(1);
    if (!size || bytes_.size() - at_ < *size) return false;
    group.value = bytes_.substr(at_, static_cast<std::size_t>(*size));
    at_ += static_cast<std::size_t>(*size);
    return true;
  }
  const std::size_t width = stored == Stored::byte      ? 1
                            : stored == Stored::short16 ? 2
                            : stored == Stored::long32  ? 4
                                                        : 8;
  const auto bits = takeBytes(width);
  if (!bits) return false;
  if (stored == Stored::real) {
    group.kind = Group::Kind::real;
    group.bits = *bits;
    return true;
  }
  group.kind = Group::Kind::whole;
  const std::int64_t whole = stored == Stored::byte      ? static_cast<std::int64_t>(*bits)
                             : stored == Stored::short16 ? static_cast<std::int16_t>(*bits)
                             : stored == Stored::long32  ? static_cast<std::int32_t>(*bits)
                                                         : static_cast<std::int64_t>(*bits);
  group.bits = static_cast<std::uint64_t>(whole);
  return true;
}

Result<bool> GroupStream::nextBinary(Group& group) {
  for (;;) {
    if (at_ >= bytes_.size()) return false;
    group = {};
    group.binary = true;
    auto code = takeBytes(wideCodes_ ? 2 : 1);
    if (code && !wideCodes_ && *code == 255) code = takeBytes(2);
    if (!code) return cutShort();
    group.code = static_cast<std::int16_t>(*code);
    group.at = at_;
    if (storedAs(group.code) == Stored::unknown) {
      return Error{
          ErrorCode::cannotRead,
          fmt::format("{} byte {}: {} is not a DXF group code; the file is damaged", name_, at_, group.code)};
    }
    if (!takeValue(group)) return cutShort();
    if (group.code != 999) return true;
  }
}

const Group* Record::find(int code) const {
  const auto found =
      std::find_if(groups.begin(), groups.end(), [code](const Group& g) { return g.code == code; });
  return found == groups.end() ? nullptr : &*found;
}

Result<double> numberOf(const Group& group, std::string_view name) {
  if (group.kind == Group::Kind::whole) return static_cast<double>(group.whole());
  const auto value =
      group.kind == Group::Kind::real ? std::optional<double>(group.real()) : parseNumber(group.value);
  if (value && std::isfinite(*value)) return *value;
  return Error{ErrorCode::cannotRead,
               fmt::format("{} {}: group {} must be a number, not '{}'; correct it or get a whole copy", name,
                           group.place(), group.code, group.shown())};
}

Result<long long> integerOf(const Group& group, std::string_view name) {
  if (group.kind == Group::Kind::whole) return static_cast<long long>(group.whole());
  if (group.kind == Group::Kind::text) {
    if (const auto value = parseInteger(group.value)) return *value;
  }
  return Error{ErrorCode::cannotRead,
               fmt::format("{} {}: group {} must be a whole number, not '{}'; correct it or get a whole copy",
                           name, group.place(), group.code, group.shown())};
}

Result<double> number(const Record& record, int code, double fallback, std::string_view name) {
  const Group* group = record.find(code);
  return group == nullptr ? Result<double>(fallback) : numberOf(*group, name);
}

Result<long long> integer(const Record& record, int code, long long fallback, std::string_view name) {
  const Group* group = record.find(code);
  return group == nullptr ? Result<long long>(fallback) : integerOf(*group, name);
}

}  // namespace kf::read
