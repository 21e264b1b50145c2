#pragma once
/// \file Timing for the benches: several bodies in turn, the least time of each.

#include <sys/mman.h>

#include <algorithm>
#include <chrono>
#include <cstdlib>
#include <functional>
#include <memory>
#include <vector>

namespace tarn::bench {

/// Least seconds of one call of each body over `rounds` rounds, bodies taking turns, each round
/// repeated until it lasts 0.2 ms so that the clock's step does not show.
inline std::vector<double> least_seconds(const std::vector<std::function<void()>>& bodies, int rounds) {
  using Clock = std::chrono::steady_clock;
  const auto time = [](const std::function<void()>& body, long repeats) {
    const auto start = Clock::now();
    for (long k = 0; k < repeats; ++k) body();
    return std::chrono::duration<double>(Clock::now() - start).count();
  };
  std::vector<long> repeats;
  std::vector<double> least;
  for (const auto& body : bodies) {
    const double once = std::max(std::min(time(body, 1), time(body, 1)), 1e-8);
    repeats.push_back(std::max(1L, static_cast<long>(2e-4 / once)));
    least.push_back(1e300);
  }
  for (int round = 0; round < rounds; ++round)
    for (std::size_t k = 0; k < bodies.size(); ++k)
      least[k] = std::min(least[k], time(bodies[k], repeats[k]) / static_cast<double>(repeats[k]));
  return least;
}

/// Doubles on huge pages where the system gives them, filled with small numbers.
class Buffer {
 public:
  explicit Buffer(std::size_t doubles) {
    constexpr std::size_t kPage = std::size_t{1} << 21;
    const std::size_t bytes = doubles * sizeof(double);
    const std::size_t alignment = bytes >= kPage ? kPage : 64;
    const std::size_t size = (bytes + alignment - 1) / alignment * alignment;
    data_.reset(static_cast<double*>(std::aligned_alloc(alignment, size)));
    if (bytes >= kPage) madvise(data_.get(), size, MADV_HUGEPAGE);
    for (std::size_t k = 0; k < doubles; ++k) data_.get()[k] = 0.001 * static_cast<double>(k % 977) - 0.3;
  }
  double* get() const { return data_.get(); }

 private:
  struct Free {
    void operator()(double* place) const { std::free(place); }
  };
  std::unique_ptr<double, Free> data_;
};

}  // namespace tarn::bench
