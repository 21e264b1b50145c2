#include <cstdio>
#include <cstdlib>
#include <string>

#include "lang/diagnostics/render.h"
#include "lang/syntax/dump.h"
#include "lang/syntax/parse.h"
#include "lang/syntax/tidy.h"
#include "tests/fuzz/target.h"

namespace {

void require(bool property, const char* what, const std::string& text) {
  if (property) return;
  std::fprintf(stderr, "broken: %s\n---\n%s\n---\n", what, text.c_str());
  std::abort();
}

}  // namespace

extern "C" int LLVMFuzzerTestOneInput(const std::uint8_t* data, std::size_t size) {
  using namespace tarn;
  SourceSet sources;
  Diagnostics diagnostics;
  const SourceFile& file = sources.add("fuzz.tarn", std::string(reinterpret_cast<const char*>(data), size));
  const Ast ast = parse(file, diagnostics);
  const std::string before = dump(ast);
  render(diagnostics, sources);
  render_json(diagnostics, sources);
  if (diagnostics.has_errors()) return 0;
  const auto once = tidy(file, diagnostics);
  require(once.has_value(), "a text without errors tidies", file.text);
  const SourceFile& again = sources.add("tidy.tarn", *once);
  require(dump(parse(again, diagnostics)) == before, "tidying keeps the meaning", file.text);
  require(tidy(again, diagnostics) == once, "tidying twice changes nothing", file.text);
  return 0;
}
