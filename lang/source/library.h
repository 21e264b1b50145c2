#pragma once
/// \file The standard library as text, built into the program (target tarn_stdlib).

#include <span>
#include <string_view>

namespace tarn {

struct LibraryText {
  std::string_view name;  ///< As in `use spectra`.
  std::string_view text;
};

/// The texts of stdlib/*.tarn, in the order of their names.
std::span<const LibraryText> standard_library();

}  // namespace tarn
