#pragma once
/// \file Numbered pieces of work that several threads share. Which thread does a piece must not matter to it.

#include <cstddef>
#include <functional>

namespace tarn::runtime {

/// Calls work(0) .. work(count - 1), each once, on `jobs` threads at most, this one among them. Rethrows what a
/// piece throws, once all threads are done; the pieces that none has begun are then left out.
void share_work(std::size_t count, std::size_t jobs, const std::function<void(std::size_t)>& work);

}  // namespace tarn::runtime
