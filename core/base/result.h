// Result<T>: a value, or one Error that says what went wrong, where, and what to do.
// No units here.
#pragma once

#include <cassert>
#include <optional>
#include <string>
#include <utility>
#include <variant>

namespace kf {

enum class ErrorCode {
  invalidArgument,  // a value outside its documented domain
  notConverged,     // an iteration ran out of its budget
  cannotRead,       // an input is missing, damaged or not understood
  unsupported,      // an input is understood but holds something that can't be used
  needsUnit,        // a drawing does not say its unit, and nobody gave one
  needsConsent,     // entities of a drawing can't be used, and nobody allowed going on without
  cannotWrite,      // an output could not be written whole
  infeasible,       // no motion exists under these limits
  auditFailed,      // a written file did not pass its independent check
  cancelled,        // the user stopped the run
};

// `message` is one sentence for people: what, where (file, line, entity, value) and what to do.
struct Error {
  ErrorCode code = ErrorCode::invalidArgument;
  std::string message;
};

template <class T>
class [[nodiscard]] Result {
 public:
  Result(T value) : content_(std::in_place_index<0>, std::move(value)) {}
  Result(Error error) : content_(std::in_place_index<1>, std::move(error)) {}

  bool ok() const { return content_.index() == 0; }
  explicit operator bool() const { return ok(); }

  const T& value() const& {
    assert(ok());
    return *std::get_if<0>(&content_);
  }
  T& value() & {
    assert(ok());
    return *std::get_if<0>(&content_);
  }
  T&& value() && {
    assert(ok());
    return std::move(*std::get_if<0>(&content_));
  }
  const T& operator*() const& { return value(); }
  T& operator*() & { return value(); }
  T&& operator*() && { return std::move(*this).value(); }
  const T* operator->() const { return &value(); }
  T* operator->() { return &value(); }

  const Error& error() const {
    assert(!ok());
    return *std::get_if<1>(&content_);
  }

 private:
  std::variant<T, Error> content_;
};

template <>
class [[nodiscard]] Result<void> {
 public:
  Result() = default;
  Result(Error error) : error_(std::move(error)) {}

  bool ok() const { return !error_; }
  explicit operator bool() const { return ok(); }
  const Error& error() const {
    assert(!ok());
    return *error_;
  }

 private:
  std::optional<Error> error_;
};

}  // namespace kf
