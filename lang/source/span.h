#pragma once
/// \file A stretch of one source text, in bytes.

#include <cstdint>

#include "lang/support/id.h"

namespace tarn {

using FileId = Id<struct FileTag>;

/// Bytes begin .. end-1 of a file. An empty span marks the place before `begin`.
struct Span {
  FileId file;
  std::uint32_t begin = 0;
  std::uint32_t end = 0;
  bool operator==(const Span&) const = default;
};

/// The smallest span that covers both; precondition: one file.
constexpr Span cover(Span a, Span b) {
  return {a.file, a.begin < b.begin ? a.begin : b.begin, a.end > b.end ? a.end : b.end};
}

}  // namespace tarn
