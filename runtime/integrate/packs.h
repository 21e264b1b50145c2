#pragma once
/// \file Eight doubles at a time, in one build for several instruction sets.

#include <cstddef>

// The loader picks the clone that the host can run. Sanitised builds cannot resolve clones.
#if defined(__x86_64__) && !defined(__SANITIZE_ADDRESS__)
#define TARN_HOST_CLONES \
  __attribute__((target_clones("default", "arch=x86-64-v3", "arch=x86-64-v4")))
#else
#define TARN_HOST_CLONES
#endif

namespace tarn::runtime {

inline constexpr std::size_t kPackWidth = 8;
using Pack = double __attribute__((vector_size(kPackWidth * sizeof(double))));

/// Eight doubles at a 64-byte boundary.
inline const Pack& pack(const double* p) { return *reinterpret_cast<const Pack*>(p); }
inline Pack& pack(double* p) { return *reinterpret_cast<Pack*>(p); }

}  // namespace tarn::runtime
