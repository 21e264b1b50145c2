#include <array>
#include <mutex>

#include "lang/support/check.h"
#include "runtime/equation/davies.h"

namespace tarn::runtime {
namespace {

using Tables = std::vector<DaviesTable>;

std::size_t bytes_of(const Tables& tables) {
  std::size_t sum = 0;
  for (const DaviesTable& table : tables) {
    sum += sizeof table + static_cast<std::size_t>(table.loss.size()) * sizeof(std::complex<double>);
    sum += table.terms.size() * sizeof(DaviesTable::Term) + table.coupled.size() * sizeof(std::uint32_t);
  }
  return sum;
}

}  // namespace

/// Of one base interval.
template <class Scalar>
struct DaviesTables<Scalar>::Cache {
  std::mutex making;
  std::array<std::shared_ptr<const Tables>, Track<Scalar>::kMaxDepth + 1> depth;
  std::size_t bytes = 0;
};

template <class Scalar>
DaviesTables<Scalar>::DaviesTables(std::shared_ptr<const Track<Scalar>> track, std::vector<BathFunctions> baths,
                                   std::shared_ptr<MemoryBudget> memory)
    : track_(std::move(track)), baths_(std::move(baths)), memory_(std::move(memory)) {
  TARN_CHECK(baths_.size() == track_->model().couplings);
  for (std::size_t i = 0; i < track_->intervals(); ++i) cache_.push_back(std::make_unique<Cache>());
}

template <class Scalar>
DaviesTables<Scalar>::~DaviesTables() {
  if (!memory_) return;
  for (const auto& cache : cache_) memory_->give_back(cache->bytes);
}

template <class Scalar>
std::shared_ptr<const Tables> DaviesTables<Scalar>::of_steps(std::size_t interval, int depth, const Steps<Scalar>& steps) const {
  Cache& cache = *cache_[interval];
  const std::scoped_lock lock(cache.making);
  auto& kept = cache.depth[static_cast<std::size_t>(depth)];
  if (kept) return kept;
  Tables tables;
  tables.reserve(steps.size());
  for (const auto& step : steps) tables.push_back(davies_table<Scalar>(track_->model(), step.middle, step.groups, baths_));
  const std::size_t bytes = bytes_of(tables);
  auto made = std::make_shared<const Tables>(std::move(tables));
  if (memory_ && !memory_->take(bytes)) return made;
  cache.bytes += bytes;
  kept = made;
  return made;
}

template class DaviesTables<double>;
template class DaviesTables<std::complex<double>>;

}  // namespace tarn::runtime
