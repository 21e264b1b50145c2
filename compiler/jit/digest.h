#pragma once
/// \file SHA-256 digests.

#include <array>
#include <cstdint>
#include <span>
#include <string>
#include <string_view>

namespace tarn::compiler {

using Digest = std::array<std::uint8_t, 32>;

Digest sha256(std::string_view bytes);

/// 64 lower-case hexadecimal digits.
std::string to_hex(const Digest& digest);

}  // namespace tarn::compiler
