#include <catch2/catch.hpp>

#include "lang/source/source_set.h"
#include "lang/source/utf8.h"

using namespace tarn;

TEST_CASE("lines and columns count from one, columns in characters") {
  SourceSet sources;
  const FileId id = sources.add("a.tarn", "ab\nc\xCE\xBC" "d\r\n\te\n").id;
  CHECK(sources.position(id, 0) == LineColumn{1, 1});
  CHECK(sources.position(id, 2) == LineColumn{1, 3});
  CHECK(sources.position(id, 3) == LineColumn{2, 1});
  CHECK(sources.position(id, 6) == LineColumn{2, 3});  // After the two bytes of mu.
  CHECK(sources.position(id, 10) == LineColumn{3, 2});
  CHECK(line_text(sources.file(id), 2) == "c\xCE\xBC" "d");
  CHECK(line_text(sources.file(id), 4).empty());
}

TEST_CASE("a byte order mark is no column") {
  SourceSet sources;
  const FileId id = sources.add("a.tarn", "\xEF\xBB\xBFlet").id;
  CHECK(sources.position(id, 3) == LineColumn{1, 1});
  CHECK(sources.position(id, 0) == LineColumn{1, 1});
}

TEST_CASE("a place marks columns of its first line") {
  SourceSet sources;
  const FileId id = sources.add("a.tarn", "let x = 3\nlet y").id;
  CHECK(sources.place({id, 8, 9}) == Place{"a.tarn", 1, 9, 9});
  CHECK(sources.place({id, 4, 14}) == Place{"a.tarn", 1, 5, 9});
  CHECK(sources.place({id, 15, 15}) == Place{"a.tarn", 2, 6, 6});
}

TEST_CASE("an empty text has one line") {
  SourceSet sources;
  const FileId id = sources.add("a.tarn", "").id;
  CHECK(sources.place({id, 0, 0}) == Place{"a.tarn", 1, 1, 1});
  CHECK(sources.text({id, 0, 0}).empty());
}

TEST_CASE("texts do not move when others are added") {
  SourceSet sources;
  const SourceFile& first = sources.add("a.tarn", "first");
  for (int i = 0; i < 1000; ++i) sources.add("b.tarn", "more");
  CHECK(&first == &sources.file(first.id));
}

// Rejected sequences: RFC 3629, section 3 and 10.
TEST_CASE("UTF-8 is decoded strictly") {
  CHECK(decode_utf8("a").code_point == 'a');
  CHECK(decode_utf8("\xCE\xBC").code_point == 0x3BC);
  CHECK(decode_utf8("\xF0\x9F\x98\x80").code_point == 0x1F600);
  for (const char* bad : {"\x80", "\xC0\x80", "\xC1\xBF", "\xE0\x80\x80", "\xED\xA0\x80", "\xF4\x90\x80\x80", "\xF8\x88\x80\x80\x80",
                          "\xCE", "\xCE(", "\xE2\x82"}) {
    CHECK(decode_utf8(bad).length == 0);
  }
}
