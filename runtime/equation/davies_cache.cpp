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

template <class Scalar>
DaviesTables<Scalar>::DaviesTables(std::shared_ptr<const Track<Scalar>> track, std::vector<BathFunctions> baths,
                                   std::shared_ptr<MemoryBudget> memory)
    : track_(std::move(track)), baths_(std::move(baths)) {
  TARN_CHECK(baths_.size() == track_->model().couplings);
  for (std::size_t i = 0; i < track_->intervals(); ++i) kept_.push_back(std::make_unique<Kept>(memory));
}

template <class Scalar>
std::shared_ptr<const Tables> DaviesTables<Scalar>::of_steps(std::size_t interval, int depth, const Steps<Scalar>& steps,
                                                             const Interrupted& interrupted) const {
  const auto make = [&]() -> std::optional<Tables> {
    Tables tables;
    tables.reserve(steps.size());
    for (const auto& step : steps) {
      if (interrupted && interrupted()) return std::nullopt;
      tables.push_back(davies_table<Scalar>(track_->model(), step.middle, step.groups, baths_));
    }
    return tables;
  };
  return kept_[interval]->get(depth, make, [](const Tables& tables) { return bytes_of(tables); });
}

template class DaviesTables<double>;
template class DaviesTables<std::complex<double>>;

}  // namespace tarn::runtime
