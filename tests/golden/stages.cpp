#include "lang/check/check.h"
#include "tests/golden/runner.h"

namespace tarn::golden {

const std::vector<Stage>& stages() {
  static const std::vector<Stage> all{
      {"parse", [](Modules modules, Diagnostics&) { return std::move(modules.sources); }},
      {"check",
       [](Modules modules, Diagnostics& diagnostics) { return check(std::move(modules), diagnostics).sources(); }},
  };
  return all;
}

}  // namespace tarn::golden
