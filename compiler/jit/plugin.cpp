#include "compiler/jit/plugin.h"

#include <dlfcn.h>
#include <elf.h>

#include <cstring>
#include <filesystem>
#include <fstream>
#include <vector>

#include "compiler/jit/host.h"

namespace tarn::compiler {
namespace {

constexpr const char* kFileName = "libtarn_codegen.so";

template <class T>
bool read_at(std::ifstream& file, std::uint64_t place, T* into, std::size_t count = 1) {
  file.seekg(static_cast<std::streamoff>(place));
  return static_cast<bool>(file.read(reinterpret_cast<char*>(into), static_cast<std::streamsize>(count * sizeof(T))));
}

/// The description of the GNU build-id note among the notes of a segment.
std::optional<std::string> find_note(const std::vector<char>& notes) {
  const auto padded = [](std::size_t size) { return (size + 3) & ~std::size_t{3}; };
  std::size_t place = 0;
  while (place + sizeof(Elf64_Nhdr) <= notes.size()) {
    Elf64_Nhdr head;
    std::memcpy(&head, notes.data() + place, sizeof head);
    const std::size_t name = place + sizeof head, text = name + padded(head.n_namesz);
    if (text + head.n_descsz > notes.size()) return std::nullopt;
    if (head.n_type == NT_GNU_BUILD_ID && head.n_namesz == 4 && std::memcmp(notes.data() + name, "GNU", 4) == 0)
      return std::string(notes.data() + text, head.n_descsz);
    place = text + padded(head.n_descsz);
  }
  return std::nullopt;
}

/// What arrives through the plug-in's callback.
struct Received {
  std::string product, message;
};

void receive(void* user, std::uint32_t what, const char* bytes, std::size_t size) {
  auto& received = *static_cast<Received*>(user);
  (what == TARN_CODEGEN_MESSAGE ? received.message : received.product).assign(bytes, size);
}

}  // namespace

std::optional<std::string> find_plugin() {
  const std::filesystem::path beside = executable_directory();
  if (beside.empty()) return std::nullopt;
  for (const auto& folder : {beside / "lib", beside.parent_path() / "lib"}) {
    std::error_code failed;
    const auto path = folder / kFileName;
    if (std::filesystem::is_regular_file(path, failed)) return path.string();
  }
  return std::nullopt;
}

std::optional<std::string> build_id(const std::string& path) {
  constexpr std::uint64_t kMostNotes = 1u << 16;
  std::ifstream file(path, std::ios::binary);
  Elf64_Ehdr head;
  if (!file || !read_at(file, 0, &head) || std::memcmp(head.e_ident, ELFMAG, SELFMAG) != 0) return std::nullopt;
  std::vector<Elf64_Phdr> segments(head.e_phnum);
  if (!read_at(file, head.e_phoff, segments.data(), segments.size())) return std::nullopt;
  for (const Elf64_Phdr& segment : segments) {
    if (segment.p_type != PT_NOTE || segment.p_filesz > kMostNotes) continue;
    std::vector<char> notes(segment.p_filesz);
    if (!read_at(file, segment.p_offset, notes.data(), notes.size())) return std::nullopt;
    if (auto id = find_note(notes)) return id;
  }
  return std::nullopt;
}

Result<Plugin, PluginError> Plugin::open(const std::string& path) {
  void* const library = dlopen(path.c_str(), RTLD_LAZY | RTLD_LOCAL);
  if (!library) {
    const char* const reason = dlerror();
    return Unexpected{PluginError{reason ? reason : path + ": cannot be loaded"}};
  }
  Plugin plugin;
  plugin.compile_ = reinterpret_cast<tarn_codegen_compile_fn>(dlsym(library, TARN_CODEGEN_COMPILE));
  plugin.load_ = reinterpret_cast<tarn_codegen_load_fn>(dlsym(library, TARN_CODEGEN_LOAD));
  plugin.release_ = reinterpret_cast<tarn_codegen_release_fn>(dlsym(library, TARN_CODEGEN_RELEASE));
  if (!plugin.compile_ || !plugin.load_ || !plugin.release_)
    return Unexpected{PluginError{path + ": is not the code generator"}};
  return plugin;
}

Result<std::string, PluginError> Plugin::compile(std::string_view text, std::uint32_t lanes, std::uint32_t product) const {
  Received received;
  const tarn_codegen_request request{text.data(), text.size(), lanes, product, receive, &received};
  if (compile_(&request) != 0) return Unexpected{PluginError{received.message}};
  return std::move(received.product);
}

Result<runtime::Kernel, PluginError> Plugin::load(std::string_view object) const {
  Received received;
  tarn_codegen_loaded loaded{};
  if (load_(object.data(), object.size(), &loaded, receive, &received) != 0) return Unexpected{PluginError{received.message}};
  auto kernel = runtime::Kernel::adopt(loaded.kernel, [release = release_, handle = loaded.handle] { release(handle); });
  if (!kernel) return Unexpected{PluginError{kernel.error().message}};
  return std::move(*kernel);
}

}  // namespace tarn::compiler
