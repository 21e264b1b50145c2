#include <fmt/format.h>

#include <cstdio>
#include <exception>
#include <new>
#include <variant>

#include "compiler/driver/commands.h"
#include "compiler/driver/messages.h"

namespace {

using namespace tarn::compiler;

constexpr int kBug = 70;

struct Dispatch {
  int operator()(const CheckCommand& command) const { return check_model(command); }
  int operator()(const ExplainCommand& command) const { return explain_model(command); }
  int operator()(const RunCommand& command) const { return run_model(command); }
  int operator()(const TidyCommand& command) const { return tidy_model(command); }
  int operator()(const EmitCommand& command) const { return emit_stage(command); }
  int operator()(const HelpCommand& help) const {
    std::fputs(help.text.c_str(), stdout);
    return kFine;
  }
  int operator()(const WrongCommandLine& wrong) const {
    show({"command_line", wrong.text, wrong.remedy}, json);
    return kWrongInput;
  }
  bool json = false;
};

int report_bug(const char* what, bool json) {
  show({"bug", fmt::format("this is a bug in tarn: {}", what), "please report it with the model"}, json);
  return kBug;
}

}  // namespace

int main(int argc, char** argv) {
  const bool json = asks_for_json(argc, argv);
  try {
    return std::visit(Dispatch{json}, parse_command_line(argc, argv));
  } catch (const std::bad_alloc&) {
    show({"out_of_memory", "there is not enough memory", "fewer `--jobs`, or fewer qubits or levels"}, json);
    return kIncomplete;
  } catch (const std::exception& bug) {
    return report_bug(bug.what(), json);
  }
}
