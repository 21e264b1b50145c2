#include <cstdio>
#include <fstream>

#include "compiler/codegen/header.h"
#include "compiler/driver/commands.h"
#include "compiler/driver/model.h"
#include "compiler/driver/prepare.h"
#include "compiler/ir/text.h"
#include "lang/check/dump.h"
#include "lang/syntax/dump.h"
#include "runtime/plan/text.h"

namespace tarn::compiler {
namespace {

/// Text or bytes of a stage that needs one experiment.
Result<std::string, CompileError> stage_of_instance(const std::string& stage, const Instance& instance,
                                                    const SourceSet& sources) {
  if (stage == "instance") return dump(instance);
  const Lowered lowered = lower_optimized(instance, sources);
  if (stage == "plan") return runtime::to_text(lowered.plan);
  if (stage == "ir") return ir::to_text(lowered.module);
  if (stage == "header") return c_header(lowered.module);
  if (stage == "llvm") return generate(lowered.module, Product::llvm);
  return generate(lowered.module, stage == "asm" ? Product::assembly : Product::object);
}

int write(const std::string& text, const std::string& path) {
  if (path.empty()) {
    std::fwrite(text.data(), 1, text.size(), stdout);
    return kFine;
  }
  std::ofstream out(path, std::ios::binary | std::ios::trunc);
  out << text;
  out.close();
  if (out) return kFine;
  std::fprintf(stderr, "tarn: error: cannot write %s\n", path.c_str());
  return kWrongInput;
}

int complain(const std::string& message) {
  std::fprintf(stderr, "tarn: error: %s\n", message.c_str());
  return kWrongInput;
}

}  // namespace

int emit_stage(const EmitCommand& command) {
  const auto model = load_model(command.model);
  if (!model) return kWrongInput;
  if (command.stage == "syntax") return write(dump(model->program.ast(0)), command.out);
  if (command.stage == "program") return write(dump(model->program), command.out);
  const auto chosen = choose_experiments(*model, command.model, command.experiment);
  if (!chosen) return kWrongInput;
  if (chosen->size() != 1) return complain("say which with --experiment NAME: the model has " + std::to_string(chosen->size()) + " experiments");
  const auto text = stage_of_instance(command.stage, chosen->front().instances.front(), model->program.sources());
  if (!text) return complain(text.error().message);
  return write(*text, command.out);
}

}  // namespace tarn::compiler
