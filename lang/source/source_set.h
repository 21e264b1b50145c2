#pragma once
/// \file The texts of one run: what every Span points into.

#include <cstdint>
#include <deque>
#include <string>
#include <string_view>
#include <vector>

#include "lang/source/span.h"
#include "lang/support/place.h"

namespace tarn {

/// One text, immutable once it is in a SourceSet.
struct SourceFile {
  FileId id;
  std::string name;  ///< As shown to the user: the path given, or `<library>/spectra.tarn`.
  std::string text;  ///< Bytes as read; at most 4 GiB.
  std::vector<std::uint32_t> line_starts;  ///< Offset of each line's first byte; never empty.
};

/// Counted from 1; the column counts characters (code points), a tab is one.
struct LineColumn {
  std::uint32_t line = 1;
  std::uint32_t column = 1;
  bool operator==(const LineColumn&) const = default;
};

/// Owns the texts; references to a SourceFile stay valid while the set lives.
class SourceSet {
 public:
  const SourceFile& add(std::string name, std::string text);

  /// Precondition: the id came from this set.
  const SourceFile& file(FileId id) const;
  std::size_t size() const { return files_.size(); }

  std::string_view text(Span span) const;
  LineColumn position(FileId id, std::uint32_t offset) const;

  /// File name, first line and the columns marked on it; a span that goes on past
  /// its first line is marked to that line's end.
  Place place(Span span) const;

 private:
  std::deque<SourceFile> files_;
};

/// A text outside any set, for tests and tools that look at one file.
SourceFile make_source(FileId id, std::string name, std::string text);

/// Line (without its end) that holds `offset`.
std::string_view line_text(const SourceFile& file, std::uint32_t line);

/// Line, counted from 1, of the byte at `offset`; in logarithmic time.
std::uint32_t line_of(const SourceFile& file, std::uint32_t offset);

/// Takes time linear in the length of the line.
LineColumn position(const SourceFile& file, std::uint32_t offset);

}  // namespace tarn
