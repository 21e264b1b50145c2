#pragma once
/// \file Invariants of our own code. A broken one is a bug, never a user's error.

#include <stdexcept>
#include <string>

namespace tarn {

/// Thrown by TARN_CHECK; caught in main and in the test harness only.
class InternalError : public std::logic_error {
  using std::logic_error::logic_error;
};

[[noreturn]] inline void fail_check(const char* condition, const char* file, int line) {
  throw InternalError(std::string(file) + ":" + std::to_string(line) + ": broken invariant: " + condition);
}

}  // namespace tarn

#define TARN_CHECK(condition) \
  ((condition) ? static_cast<void>(0) : ::tarn::fail_check(#condition, __FILE__, __LINE__))
