#include "runtime/trajectories/shared_work.h"

#include <algorithm>
#include <atomic>
#include <exception>
#include <mutex>
#include <thread>
#include <vector>

namespace tarn::runtime {

void share_work(std::size_t count, std::size_t jobs, const std::function<void(std::size_t)>& work) {
  std::atomic<std::size_t> next = 0;
  std::exception_ptr failure;
  std::mutex failing;
  const auto go_on = [&] {
    for (std::size_t k = next++; k < count; k = next++) {
      try {
        work(k);
      } catch (...) {
        const std::scoped_lock lock(failing);
        if (!failure) failure = std::current_exception();
        next = count;
      }
    }
  };
  std::vector<std::thread> helpers;
  for (std::size_t j = 1; j < std::min(jobs, count); ++j) helpers.emplace_back(go_on);
  go_on();
  for (std::thread& helper : helpers) helper.join();
  if (failure) std::rethrow_exception(failure);
}

}  // namespace tarn::runtime
