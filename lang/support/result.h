#pragma once
/// \file A value or an error: Result<T, E>, with the spelling of std::expected.

#include <utility>
#include <variant>

namespace tarn {

/// Wraps an error so that Result<T, E> knows which of the two it is given.
template <class E>
struct Unexpected {
  E error;
};
template <class E>
Unexpected(E) -> Unexpected<E>;

/// Holds a T, or the E that says why there is none.
template <class T, class E>
class Result {
 public:
  Result(T value) : state_(std::in_place_index<0>, std::move(value)) {}
  template <class G>
  Result(Unexpected<G> failure) : state_(std::in_place_index<1>, std::move(failure.error)) {}

  bool has_value() const { return state_.index() == 0; }
  explicit operator bool() const { return has_value(); }

  /// Precondition: has_value().
  T& value() & { return *std::get_if<0>(&state_); }
  const T& value() const& { return *std::get_if<0>(&state_); }
  T&& value() && { return std::move(*std::get_if<0>(&state_)); }
  T& operator*() & { return value(); }
  const T& operator*() const& { return value(); }
  T* operator->() { return &value(); }
  const T* operator->() const { return &value(); }

  /// Precondition: !has_value().
  const E& error() const { return *std::get_if<1>(&state_); }

 private:
  std::variant<T, E> state_;
};

/// The outcome of something that yields no value.
using Done = std::monostate;

}  // namespace tarn
