// Reading many groups of one DXF record, remembering the first failure; internal to read.
// No units here.
#pragma once

#include <optional>
#include <string_view>

#include "core/curve/vec2.h"
#include "core/read/dxf_groups.h"

namespace kf::read {

class Fields {
 public:
  Fields(const Record& record, std::string_view name) : record_(record), name_(name) {}

  double real(int code, double fallback = 0.0) {
    return kept(number(record_, code, fallback, name_), fallback);
  }
  long long whole(int code, long long fallback = 0) {
    return kept(integer(record_, code, fallback, name_), fallback);
  }
  curve::Vec2 point(int code) { return {real(code), real(code + 10)}; }
  bool has(int code) const { return record_.find(code) != nullptr; }
  double of(const Group& group) { return kept(numberOf(group, name_), 0.0); }
  long long wholeOf(const Group& group) { return kept(integerOf(group, name_), 0LL); }
  const Record& record() const { return record_; }
  const std::optional<Error>& failed() const { return failed_; }

 private:
  template <class T>
  T kept(const Result<T>& value, T fallback) {
    if (value) return *value;
    if (!failed_) failed_ = value.error();
    return fallback;
  }

  const Record& record_;
  std::string_view name_;
  std::optional<Error> failed_;
};

}  // namespace kf::read
