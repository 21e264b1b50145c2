#include "tests/golden/runner.h"

namespace tarn::golden {

const std::vector<Stage>& stages() {
  static const std::vector<Stage> all{
      {"parse", [](Modules modules, Diagnostics&) { return std::move(modules.sources); }},
  };
  return all;
}

}  // namespace tarn::golden
