#include "compiler/jit/host.h"

#include <cpuid.h>
#include <dlfcn.h>
#include <link.h>
#include <unistd.h>

#include <filesystem>

namespace tarn::compiler {
namespace {

std::uint32_t saved_registers() {
  std::uint32_t low = 0, high = 0;
  __asm__ volatile("xgetbv" : "=a"(low), "=d"(high) : "c"(0));
  return low;
}

}  // namespace

std::vector<std::uint32_t> processor_words() {
  std::vector<std::uint32_t> words;
  std::uint32_t a = 0, b = 0, c = 0, d = 0;
  if (__get_cpuid(0, &a, &b, &c, &d)) words.insert(words.end(), {b, c, d});
  if (__get_cpuid(1, &a, &b, &c, &d)) words.insert(words.end(), {a, c, d});  // b tells which core this is
  if ((c >> 27 & 1) != 0) words.push_back(saved_registers());
  if (__get_cpuid_count(7, 0, &a, &b, &c, &d)) words.insert(words.end(), {b, c, d});
  if (__get_cpuid_count(7, 1, &a, &b, &c, &d)) words.insert(words.end(), {a, d});
  if (__get_cpuid(0x80000001u, &a, &b, &c, &d)) words.insert(words.end(), {c, d});
  return words;
}

std::string executable_directory() {
  std::error_code failed;
  const auto path = std::filesystem::read_symlink("/proc/self/exe", failed);
  return failed ? std::string() : path.parent_path().string();
}

std::string library_path(const std::string& name) {
  void* const library = dlopen(name.c_str(), RTLD_LAZY | RTLD_LOCAL);
  if (!library) return {};
  struct link_map* map = nullptr;
  std::string path;
  if (dlinfo(library, RTLD_DI_LINKMAP, &map) == 0 && map) path = map->l_name;
  dlclose(library);
  return path;
}

}  // namespace tarn::compiler
