#include "runtime/kernel/kernel.h"

#include <dlfcn.h>

#include "lang/support/check.h"

namespace tarn::runtime {
namespace {

using Code = void (*)(void);

Code find_entry(const tarn_kernel& table, std::uint32_t kind, std::uint32_t index) {
  for (std::uint32_t k = 0; k < table.entries; ++k)
    if (table.entry[k].kind == kind && table.entry[k].index == index) return table.entry[k].code;
  return nullptr;
}

/// What is wrong with a table; empty if nothing.
std::string fault(const tarn_kernel& table) {
  if (table.abi_version != TARN_ABI_VERSION)
    return "the kernel speaks version " + std::to_string(table.abi_version) + " of the interface, this program version " +
           std::to_string(TARN_ABI_VERSION);
  if (table.lanes != 2 && table.lanes != 4 && table.lanes != 8) return "the kernel has an impossible number of lanes";
  for (std::uint32_t set = 0; set < table.sets; ++set)
    if (!find_entry(table, TARN_VALUES, set)) return "the kernel has a function set without code";
  for (std::uint32_t generator = 0; generator < table.generators; ++generator)
    for (const std::uint32_t kind : {TARN_PREPARE, TARN_APPLY, TARN_STAGE})
      if (!find_entry(table, kind, generator)) return "the kernel has a generator without code";
  return {};
}

}  // namespace

Kernel::State::~State() {
  if (release) release();
}

Result<Kernel, LoadError> Kernel::open(const std::string& path) {
  void* const library = dlopen(path.c_str(), RTLD_NOW | RTLD_LOCAL);
  if (!library) {
    const char* const reason = dlerror();
    return Unexpected{LoadError{reason ? reason : path + ": cannot be loaded"}};
  }
  const auto release = [library] { dlclose(library); };
  const auto* const table = static_cast<const tarn_kernel*>(dlsym(library, "tarn_kernel_table"));
  if (!table) {
    release();
    return Unexpected{LoadError{path + ": is no kernel: it exports no tarn_kernel_table"}};
  }
  return adopt(table, release);
}

Result<Kernel, LoadError> Kernel::adopt(const tarn_kernel* table, std::function<void()> release) {
  auto state = std::make_shared<State>();
  state->table = table;
  state->release = std::move(release);
  if (std::string wrong = fault(*table); !wrong.empty()) return Unexpected{LoadError{std::move(wrong)}};
  return Kernel(std::move(state));
}

std::optional<std::uint32_t> Kernel::find_set(std::string_view name) const {
  for (std::uint32_t set = 0; set < sets(); ++set)
    if (name == set_name(set)) return set;
  return std::nullopt;
}

std::optional<std::uint32_t> Kernel::find_generator(std::string_view name) const {
  for (std::uint32_t generator = 0; generator < generators(); ++generator)
    if (name == generator_name(generator)) return generator;
  return std::nullopt;
}

const char* Kernel::set_name(std::uint32_t set) const {
  TARN_CHECK(set < sets());
  return state_->table->set[set].name;
}

const char* Kernel::generator_name(std::uint32_t generator) const {
  TARN_CHECK(generator < generators());
  return state_->table->generator[generator].name;
}

std::uint32_t Kernel::rows(std::uint32_t set) const {
  TARN_CHECK(set < sets());
  return state_->table->set[set].rows;
}

std::uint32_t Kernel::bits(std::uint32_t generator) const {
  TARN_CHECK(generator < generators());
  return state_->table->generator[generator].bits;
}

std::uint32_t Kernel::prepared_doubles(std::uint32_t generator) const {
  TARN_CHECK(generator < generators());
  return state_->table->generator[generator].prepared_doubles;
}

void (*Kernel::entry(std::uint32_t kind, std::uint32_t index) const)(void) {
  return find_entry(*state_->table, kind, index);
}

tarn_values_fn Kernel::values(std::uint32_t set) const { return reinterpret_cast<tarn_values_fn>(entry(TARN_VALUES, set)); }
tarn_values_fn Kernel::derivatives(std::uint32_t set) const {
  return reinterpret_cast<tarn_values_fn>(entry(TARN_DERIVATIVES, set));
}
tarn_prepare_fn Kernel::prepare(std::uint32_t generator) const {
  return reinterpret_cast<tarn_prepare_fn>(entry(TARN_PREPARE, generator));
}
tarn_apply_fn Kernel::apply(std::uint32_t generator) const {
  return reinterpret_cast<tarn_apply_fn>(entry(TARN_APPLY, generator));
}
tarn_stage_fn Kernel::stage(std::uint32_t generator) const {
  return reinterpret_cast<tarn_stage_fn>(entry(TARN_STAGE, generator));
}
tarn_apply_fn Kernel::lane_apply(std::uint32_t generator) const {
  return reinterpret_cast<tarn_apply_fn>(entry(TARN_LANE_APPLY, generator));
}
tarn_stage_fn Kernel::lane_stage(std::uint32_t generator) const {
  return reinterpret_cast<tarn_stage_fn>(entry(TARN_LANE_STAGE, generator));
}

}  // namespace tarn::runtime
