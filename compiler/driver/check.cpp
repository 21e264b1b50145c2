#include <cstdio>

#include "compiler/driver/commands.h"
#include "compiler/driver/model.h"

namespace tarn::compiler {

int check_model(const CheckCommand& command) {
  const auto model = load_model(command.model);
  if (!model) return kWrongInput;
  const auto chosen = choose_experiments(*model, command.model, "");
  if (!chosen || !chosen->complete) return kWrongInput;
  std::printf("%s: fine; %zu experiment%s\n", command.model.file.c_str(), model->program.experiments.size(),
              model->program.experiments.size() == 1 ? "" : "s");
  return kFine;
}

}  // namespace tarn::compiler
