#pragma once
/// \file A plain interpreter of ir::Module, written apart from the compiler's own code, and storage
/// for kernels' vectors.

#include <cstdlib>
#include <memory>
#include <new>
#include <span>
#include <vector>

#include "compiler/ir/module.h"
#include "runtime/kernel/input_block.h"

namespace tarn::test {

struct Point {
  double s = 0, t = 0, w = 0;
};

/// The value of every row of the module at one point; truths are 0 and 1.
std::vector<double> interpret(const ir::Module& module, std::span<const double> inputs, Point point);

/// The tables' numbers in the form the kernel takes.
std::vector<runtime::TableNumbers> numbers_of(const ir::Module& module);

/// Memory aligned to 64 bytes, as the kernel's interface asks.
template <class T>
struct Aligned {
  using value_type = T;
  Aligned() = default;
  template <class U>
  Aligned(const Aligned<U>&) {}
  T* allocate(std::size_t n) { return static_cast<T*>(::operator new(n * sizeof(T), std::align_val_t(64))); }
  void deallocate(T* place, std::size_t) { ::operator delete(place, std::align_val_t(64)); }
  bool operator==(const Aligned&) const { return true; }
};
using Doubles = std::vector<double, Aligned<double>>;

}  // namespace tarn::test
