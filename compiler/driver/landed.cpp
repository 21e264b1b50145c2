#include "compiler/driver/landed.h"

namespace tarn::compiler {

void refuse_not_landed(std::span<const Instance> instances, Diagnostics& diagnostics) {
  for (const Instance& instance : instances) {
    if (instance.trajectories) {
      diagnostics.report(instance.span, diag::not_available, "`trajectories`", "the density matrix, which every equation gives without it");
    }
    if (instance.levels_auto) diagnostics.report(instance.span, diag::not_available, "`levels auto`", "`levels K` with a number K");
  }
}

}  // namespace tarn::compiler
