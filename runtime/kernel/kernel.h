#pragma once
/// \file A checked handle on one compiled kernel, however it came into the process.

#include <cstdint>
#include <functional>
#include <memory>
#include <optional>
#include <string>
#include <string_view>

#include "lang/support/result.h"
#include "runtime/abi/kernel.h"

namespace tarn::runtime {

/// Why a kernel cannot be used.
struct LoadError {
  std::string message;
};

/// An immutable kernel with all its entries looked up. Copies share it; the code stays loaded while
/// one of them lives. Safe to use from several threads.
class Kernel {
 public:
  /// From a shared object that exports `tarn_kernel_table`.
  /// Errors: the file cannot be loaded, is no kernel, or is one of another ABI version.
  static Result<Kernel, LoadError> open(const std::string& path);

  /// From a table in memory; `release` runs when the last copy is gone. Errors as of open().
  static Result<Kernel, LoadError> adopt(const tarn_kernel* table, std::function<void()> release);

  std::uint32_t lanes() const { return state_->table->lanes; }
  std::uint32_t inputs() const { return state_->table->inputs; }
  std::uint32_t tables() const { return state_->table->tables; }
  std::uint32_t sets() const { return state_->table->sets; }
  std::uint32_t generators() const { return state_->table->generators; }

  /// The set or generator of that name.
  std::optional<std::uint32_t> find_set(std::string_view name) const;
  std::optional<std::uint32_t> find_generator(std::string_view name) const;

  /// The accessors below ask for a row that exists.
  const char* set_name(std::uint32_t set) const;
  const char* generator_name(std::uint32_t generator) const;
  std::uint32_t rows(std::uint32_t set) const;
  std::uint32_t bits(std::uint32_t generator) const;
  std::uint32_t prepared_doubles(std::uint32_t generator) const;

  /// Every set has values, every generator prepare, apply and stage: checked when loaded.
  tarn_values_fn values(std::uint32_t set) const;
  tarn_prepare_fn prepare(std::uint32_t generator) const;
  tarn_apply_fn apply(std::uint32_t generator) const;
  tarn_stage_fn stage(std::uint32_t generator) const;

  /// Null if not compiled.
  tarn_values_fn derivatives(std::uint32_t set) const;
  tarn_apply_fn lane_apply(std::uint32_t generator) const;
  tarn_stage_fn lane_stage(std::uint32_t generator) const;

 private:
  struct State {
    const tarn_kernel* table = nullptr;
    std::function<void()> release;
    State() = default;
    State(const State&) = delete;
    State& operator=(const State&) = delete;
    ~State();
  };
  explicit Kernel(std::shared_ptr<const State> state) : state_(std::move(state)) {}
  void (*entry(std::uint32_t kind, std::uint32_t index) const)(void);

  std::shared_ptr<const State> state_;
};

}  // namespace tarn::runtime
