#pragma once
/// \file Values that are made once for a key and shared; the last used ones are kept.

#include <algorithm>
#include <memory>
#include <mutex>
#include <optional>
#include <vector>

namespace tarn::runtime {

/// Safe to use from several threads: who asks for a value that another thread is making waits for
/// it. `Value` must be cheap to copy.
template <class Value>
class KeyedCache {
 public:
  /// `kept` >= 1 values stay in memory.
  explicit KeyedCache(std::size_t kept) : kept_(kept) {}

  template <class Make>
  Value get(const std::vector<double>& key, const Make& make) {
    const std::shared_ptr<Entry> entry = entry_for(key);
    const std::scoped_lock lock(entry->making);
    if (!entry->value) entry->value.emplace(make());
    return *entry->value;
  }

 private:
  struct Entry {
    std::vector<double> key;
    std::mutex making;
    std::optional<Value> value;
  };

  std::shared_ptr<Entry> entry_for(const std::vector<double>& key) {
    const std::scoped_lock lock(guard_);
    const auto found = std::find_if(entries_.begin(), entries_.end(), [&](const auto& entry) { return entry->key == key; });
    if (found != entries_.end()) {
      std::rotate(found, found + 1, entries_.end());
      return entries_.back();
    }
    if (entries_.size() >= kept_) entries_.erase(entries_.begin());
    entries_.push_back(std::make_shared<Entry>());
    entries_.back()->key = key;
    return entries_.back();
  }

  std::size_t kept_;
  std::mutex guard_;
  std::vector<std::shared_ptr<Entry>> entries_;  ///< Last used last.
};

}  // namespace tarn::runtime
