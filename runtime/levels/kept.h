#pragma once
/// \file Values by depth that are made once, shared, and kept while there is memory for them.

#include <array>
#include <cstddef>
#include <memory>
#include <mutex>
#include <optional>
#include <utility>

#include "runtime/levels/budget.h"

namespace tarn::runtime {

/// Safe to use from several threads: a depth is made by one at a time, others wait for it. What a depth
/// holds must not depend on who makes it.
template <class Value, int kMaxDepth>
class KeptByDepth {
 public:
  /// No budget: everything is kept.
  explicit KeptByDepth(std::shared_ptr<MemoryBudget> budget) : budget_(std::move(budget)) {}
  ~KeptByDepth() {
    if (!budget_) return;
    for (const Entry& entry : entries_) budget_->give_back(entry.bytes);
  }
  KeptByDepth(const KeptByDepth&) = delete;
  KeptByDepth& operator=(const KeptByDepth&) = delete;

  /// The value of `depth`: the one that is kept, or what `make()` returns, an optional. Null where that is empty.
  /// `bytes_of(value)` is what keeping it takes.
  template <class Make, class BytesOf>
  std::shared_ptr<const Value> get(int depth, const Make& make, const BytesOf& bytes_of) {
    Entry& entry = entries_[static_cast<std::size_t>(depth)];
    const std::scoped_lock lock(entry.making);
    if (entry.kept) return entry.kept;
    std::optional<Value> value = make();
    if (!value) return nullptr;
    const std::size_t bytes = bytes_of(*value);
    auto made = std::make_shared<const Value>(*std::move(value));
    if (budget_ && !budget_->take(bytes)) return made;
    entry.bytes = budget_ ? bytes : 0;
    entry.kept = made;
    return made;
  }

 private:
  struct Entry {
    std::mutex making;
    std::shared_ptr<const Value> kept;
    std::size_t bytes = 0;  ///< Taken from the budget.
  };

  std::shared_ptr<MemoryBudget> budget_;
  std::array<Entry, kMaxDepth + 1> entries_;
};

}  // namespace tarn::runtime
