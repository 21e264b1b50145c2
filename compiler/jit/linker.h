#pragma once
/// \file The system's linker.

#include <optional>
#include <string>

namespace tarn::compiler {

/// `ld` in the absolute folders of $PATH.
std::optional<std::string> find_linker();

/// Makes a shared object that needs libmvec and libm only where it uses them. False if ld fails.
bool link_shared(const std::string& linker, const std::string& object, const std::string& shared_object);

}  // namespace tarn::compiler
