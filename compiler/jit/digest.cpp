#include "compiler/jit/digest.h"

#include <sys/types.h>

#include <sha256.h>

namespace tarn::compiler {

Digest sha256(std::string_view bytes) {
  SHA2_CTX context;
  SHA256Init(&context);
  SHA256Update(&context, reinterpret_cast<const std::uint8_t*>(bytes.data()), bytes.size());
  Digest digest;
  SHA256Final(digest.data(), &context);
  return digest;
}

std::string to_hex(const Digest& digest) {
  constexpr std::string_view kDigits = "0123456789abcdef";
  std::string text;
  for (const std::uint8_t byte : digest) {
    text += kDigits[byte >> 4];
    text += kDigits[byte & 15];
  }
  return text;
}

}  // namespace tarn::compiler
