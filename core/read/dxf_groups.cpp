// The group pairs of a DXF text file.
// No units here.
#include "core/read/dxf_groups.h"

#include <algorithm>
#include <cstring>

#include <fmt/format.h>

#include "core/read/text.h"

namespace kf::read {

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

Result<std::optional<Group>> GroupStream::next() {
  for (;;) {
    std::string_view code, value;
    if (!takeLine(code)) return std::optional<Group>();
    const auto number = parseInteger(code);
    if (!number || *number < -5 || *number > 1071) {
      // Blank lines at the very end do no harm.
      if (trimmed(code).empty() &&
          trimmed(bytes_.substr(at_)).find_first_not_of("\n") == std::string_view::npos) {
        at_ = bytes_.size();
        return std::optional<Group>();
      }
      return Error{
          ErrorCode::cannotRead,
          fmt::format("{} line {}: '{}' is not a DXF group code; the file is damaged or not DXF text", name_,
                      line_, toUtf8(code.substr(0, 40)))};
    }
    if (!takeLine(value)) {
      return Error{
          ErrorCode::cannotRead,
          fmt::format("{} ends at line {} in the middle of a group; the file is cut short, get a whole copy",
                      name_, line_)};
    }
    if (*number != 999) return std::optional<Group>(Group{static_cast<int>(*number), value, line_});
  }
}

const Group* Record::find(int code) const {
  const auto found =
      std::find_if(groups.begin(), groups.end(), [code](const Group& g) { return g.code == code; });
  return found == groups.end() ? nullptr : &*found;
}

std::string Record::place() const {
  return fmt::format("line {}", line);
}

Result<double> numberOf(const Group& group, std::string_view name) {
  if (const auto value = parseNumber(group.value)) return *value;
  return Error{ErrorCode::cannotRead,
               fmt::format("{} line {}: group {} must be a number, not '{}'; correct it or get a whole copy",
                           name, group.line, group.code, toUtf8(group.value.substr(0, 40)))};
}

Result<double> number(const Record& record, int code, double fallback, std::string_view name) {
  const Group* group = record.find(code);
  return group == nullptr ? Result<double>(fallback) : numberOf(*group, name);
}

Result<long long> integer(const Record& record, int code, long long fallback, std::string_view name) {
  const Group* group = record.find(code);
  if (group == nullptr) return fallback;
  if (const auto value = parseInteger(group->value)) return *value;
  return Error{ErrorCode::cannotRead,
               fmt::format("{} line {}: group {} must be a whole number, not '{}'", name, group->line,
                           group->code, toUtf8(group->value.substr(0, 40)))};
}

}  // namespace kf::read
