#include <cstdio>
#include <exception>
#include <variant>

#include "compiler/driver/commands.h"
#include "lang/support/check.h"

namespace {

using namespace tarn::compiler;

struct Dispatch {
  int operator()(const CheckCommand& command) const { return check_model(command); }
  int operator()(const ExplainCommand& command) const { return explain_model(command); }
  int operator()(const RunCommand& command) const { return run_model(command); }
  int operator()(const TidyCommand& command) const { return tidy_model(command); }
  int operator()(const EmitCommand& command) const { return emit_stage(command); }
  int operator()(const Exit& exit) const {
    std::fputs(exit.text.c_str(), exit.status == 0 ? stdout : stderr);
    return exit.status;
  }
};

constexpr int kBug = 70;

}  // namespace

int main(int argc, char** argv) {
  try {
    return std::visit(Dispatch{}, parse_command_line(argc, argv));
  } catch (const tarn::InternalError& bug) {
    std::fprintf(stderr, "tarn: this is a bug in tarn, please report it with the model: %s\n", bug.what());
  } catch (const std::bad_alloc&) {
    std::fputs("tarn: error: not enough memory\n", stderr);
    return kIncomplete;
  } catch (const std::exception& bug) {
    std::fprintf(stderr, "tarn: this is a bug in tarn, please report it with the model: %s\n", bug.what());
  }
  return kBug;
}
