#pragma once
/// \file Memory that caches share: who finds none left makes a value again instead of keeping it.

#include <atomic>
#include <cstddef>
#include <cstdint>

namespace tarn::runtime {

/// Bytes that may still be kept. Safe to use from several threads.
class MemoryBudget {
 public:
  explicit MemoryBudget(double bytes) : left_(static_cast<std::int64_t>(bytes)) {}

  /// True if `bytes` were left; they are then the caller's until given back.
  bool take(std::size_t bytes) {
    const auto wanted = static_cast<std::int64_t>(bytes);
    if (left_.fetch_sub(wanted) >= wanted) return true;
    left_.fetch_add(wanted);
    return false;
  }
  void give_back(std::size_t bytes) { left_.fetch_add(static_cast<std::int64_t>(bytes)); }

 private:
  std::atomic<std::int64_t> left_;
};

}  // namespace tarn::runtime
