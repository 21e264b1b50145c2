#include <cstdio>
#include <fstream>

#include "compiler/codegen/header.h"
#include "compiler/driver/commands.h"
#include "compiler/driver/messages.h"
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

int complain(const EmitCommand& command, const Message& message, int status) {
  show(message, command.model.json_diagnostics);
  return status;
}

int write(const std::string& text, const EmitCommand& command) {
  const std::string& path = command.out;
  if (path.empty()) {
    std::fwrite(text.data(), 1, text.size(), stdout);
    return kFine;
  }
  std::ofstream out(path, std::ios::binary | std::ios::trunc);
  out << text;
  out.close();
  if (out) return kFine;
  return complain(command, {"not_written", "`" + path + "` cannot be written"}, kWrongInput);
}

}  // namespace

int emit_stage(const EmitCommand& command) {
  const auto model = load_model(command.model);
  if (!model) return kWrongInput;
  if (command.stage == "syntax") return write(dump(model->program.ast(0)), command);
  if (command.stage == "program") return write(dump(model->program), command);
  const auto chosen = choose_experiments(*model, command.model, command.experiment);
  if (!chosen || !chosen->complete) return kWrongInput;
  const std::size_t count = chosen->fitting.size();
  if (count != 1) {
    return complain(command,
                    {"command_line", "the model has " + (count == 0 ? "no" : std::to_string(count)) + " experiments",
                     count == 0 ? "stages up to `program` need none" : "say which with `--experiment NAME`"},
                    kWrongInput);
  }
  const auto text = stage_of_instance(command.stage, chosen->fitting.front().instances.front(), model->program.sources());
  if (!text) return complain(command, {"no_kernel", text.error().message}, kIncomplete);
  return write(*text, command);
}

}  // namespace tarn::compiler
