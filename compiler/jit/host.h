#pragma once
/// \file What this processor is, as far as compiled code depends on it.

#include <cstdint>
#include <string>
#include <vector>

namespace tarn::compiler {

/// The CPUID words of vendor, model and instruction sets and the register state the system saves.
/// Equal words: code compiled for one processor runs, and gives the same bits, on the other.
std::vector<std::uint32_t> processor_words();

/// The directory of the running executable; empty if the system does not tell.
std::string executable_directory();

/// Where the loader found a library that this process can open, e.g. libmvec.so.1; empty if nowhere.
std::string library_path(const std::string& name);

}  // namespace tarn::compiler
