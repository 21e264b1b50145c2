#include "compiler/driver/options.h"

#include <fmt/format.h>

#include <CLI/CLI.hpp>
#include <algorithm>
#include <charconv>
#include <filesystem>
#include <string_view>

#include "lang/support/near.h"

namespace tarn::compiler {
namespace {

constexpr const char* kAbout =
    "Tarn: models of small annealing chips, their noise and the experiments made on them.";
constexpr const char* kVersion = TARN_VERSION;

std::vector<Override> split_overrides(const std::vector<std::string>& texts) {
  std::vector<Override> result;
  for (const std::string& text : texts) {
    const std::size_t equals = text.find('=');
    result.push_back({text.substr(0, equals), text.substr(equals + 1)});
  }
  return result;
}

/// What an option's text must look like, told as CLI11 wants it: empty if it is right.
std::string check_override(const std::string& text) {
  const std::size_t equals = text.find('=');
  return equals == 0 || equals == std::string::npos
             ? fmt::format("NAME=VALUE is asked for, such as ta=\"5 us\", found `{}`", text)
             : "";
}

/// The candidate that a word may be a slip for: nearly alike, or the same letters in another order.
std::string_view meant(std::string_view word, const std::vector<std::string_view>& candidates) {
  if (const std::string_view near = near_word(word, candidates); !near.empty()) return near;
  const auto sorted = [](std::string_view text) {
    std::string letters(text);
    std::sort(letters.begin(), letters.end());
    return letters;
  };
  const auto same = std::find_if(candidates.begin(), candidates.end(),
                                 [&](std::string_view candidate) { return sorted(candidate) == sorted(word); });
  return same == candidates.end() ? std::string_view() : *same;
}

/// A whole number from 1 to `most`.
CLI::Validator whole_number(std::uint64_t most) {
  return CLI::Validator(
      [most](const std::string& text) {
        std::uint64_t number = 0;
        const char* const end = text.data() + text.size();
        const auto [at, failure] = std::from_chars(text.data(), end, number);
        const bool fits = failure == std::errc() && at == end && number >= 1 && number <= most;
        return fits ? std::string() : fmt::format("a whole number from 1 to {} is asked for, found `{}`", most, text);
      },
      "");
}

CLI::Validator one_of(std::vector<std::string> words) {
  return CLI::Validator(
      [words = std::move(words)](const std::string& text) {
        if (std::find(words.begin(), words.end(), text) != words.end()) return std::string();
        const std::vector<std::string_view> views(words.begin(), words.end());
        const std::string_view near = meant(text, views);
        return fmt::format("`{}` is none of {}{}", text, fmt::join(words, ", "),
                           near.empty() ? "" : fmt::format("; did you mean `{}`?", near));
      },
      "");
}

std::string check_folder(const std::string& text) {
  std::error_code failure;
  return std::filesystem::is_directory(text, failure) ? "" : fmt::format("there is no folder `{}`", text);
}

/// Seconds from 90s, 15min or 2h. A number alone is refused: it could be minutes.
std::optional<double> parse_duration(const std::string& text) {
  std::size_t used = 0;
  double number = 0;
  try {
    number = std::stod(text, &used);
  } catch (const std::exception&) {
    return std::nullopt;
  }
  const std::string unit = text.substr(text.find_first_not_of(' ', used) == std::string::npos
                                           ? text.size()
                                           : text.find_first_not_of(' ', used));
  const double seconds = unit == "s" ? 1 : unit == "min" ? 60 : unit == "h" ? 3600 : 0;
  if (seconds == 0 || !(number > 0) || number > 1e9) return std::nullopt;
  return number * seconds;
}

/// The options of all commands while CLI11 fills them.
struct Raw {
  ModelOptions model;
  std::vector<std::string> overrides;
  std::string diagnostics = "text";
  std::string experiment, out, stage, time_limit;
  unsigned jobs = 0;
  std::uint64_t sample = 0;
  bool no_cache = false, timings = false, in_place = false;
};

void add_model(CLI::App& command, Raw& raw) {
  command.add_option("FILE", raw.model.file, "The model, a .tarn file")->required();
  command.add_option("--also-read", raw.model.also_read, "A folder beside the model's that `use` and tables may read")
      ->check(check_folder)
      ->allow_extra_args(false)
      ->type_name("DIR");
  command.add_option("--diagnostics", raw.diagnostics, "How messages are written: text or json (one object a line)")
      ->check(one_of({"text", "json"}))
      ->type_name("FORM");
}

void add_overrides(CLI::App& command, Raw& raw) {
  command.add_option("--set", raw.overrides, "Give a parameter another value: --set ta=\"5 us\"")
      ->check(check_override)
      ->type_name("NAME=VALUE")
      ->allow_extra_args(false);
}

void add_experiment(CLI::App& command, Raw& raw) {
  command.add_option("--experiment", raw.experiment, "Only this experiment of the model")->type_name("NAME");
}

void add_cache(CLI::App& command, Raw& raw) {
  command.add_flag("--no-cache", raw.no_cache, "Neither read nor write the cache of compiled models");
}

constexpr const char* kAboutRun =
    "Exit status: 2 if the text, the command line or the folder is wrong; else 3 if a\n"
    "point failed or the run did not finish; else 1 if a claim failed; else 0. A point\n"
    "whose error stayed above the tolerance asked is marked in the column `status` and\n"
    "said at the end; it is no failure.";

void add_run(CLI::App& app, Raw& raw) {
  CLI::App* command = app.add_subcommand("run", "Run the model's experiments and leave their results in files");
  command->footer(kAboutRun);
  add_model(*command, raw);
  add_experiment(*command, raw);
  add_overrides(*command, raw);
  command->add_option("--out", raw.out, "Folder for the results (default: MODEL-results here)")->type_name("DIR");
  command->add_option("--jobs", raw.jobs, "Grid points computed at a time (default: one for each core)")
      ->check(whole_number(1024))
      ->type_name("N");
  command->add_option("--sample", raw.sample, "Only N points, spread evenly over the grid; a later run goes on from them")
      ->check(whole_number(std::uint64_t{1} << 40))
      ->type_name("N");
  command->add_option("--time-limit", raw.time_limit, "Stop in good order after this time: 90s, 15min, 2h")
      ->check([](const std::string& text) {
        return parse_duration(text) ? std::string()
                                    : fmt::format("a time such as 90s, 15min or 2h is asked for, found `{}`", text);
      })
      ->type_name("TIME");
  add_cache(*command, raw);
  command->add_flag("--timings", raw.timings, "Show where the time went");
}

void add_commands(CLI::App& app, Raw& raw) {
  CLI::App* check = app.add_subcommand("check", "Check a model: names, dimensions, chips, experiments");
  add_model(*check, raw);
  add_overrides(*check, raw);
  CLI::App* explain = app.add_subcommand("explain", "Show a model as resolved: terms, scales, gap, kernels");
  add_model(*explain, raw);
  add_experiment(*explain, raw);
  add_overrides(*explain, raw);
  add_cache(*explain, raw);
  add_run(app, raw);
  CLI::App* tidy = app.add_subcommand("tidy", "Write a model in its usual layout");
  add_model(*tidy, raw);
  tidy->add_flag("--in-place", raw.in_place, "Rewrite the file instead of printing the text");
  CLI::App* emit = app.add_subcommand("emit", "Show one stage of compilation");
  add_model(*emit, raw);
  add_experiment(*emit, raw);
  add_overrides(*emit, raw);
  emit->add_option("--stage", raw.stage, "The stage to show")->required()->check(one_of(emit_stages()))->type_name("STAGE");
  emit->add_option("--out", raw.out, "Write to this file instead of standard output")->type_name("FILE");
}

Command build(const CLI::App& app, const Raw& raw) {
  ModelOptions model = raw.model;
  model.overrides = split_overrides(raw.overrides);
  model.json_diagnostics = raw.diagnostics == "json";
  const CompileOptions compile{!raw.no_cache};
  if (app.got_subcommand("check")) return CheckCommand{model};
  if (app.got_subcommand("explain")) return ExplainCommand{model, raw.experiment, compile};
  if (app.got_subcommand("tidy")) return TidyCommand{model, raw.in_place};
  if (app.got_subcommand("emit")) return EmitCommand{model, raw.experiment, raw.stage, raw.out};
  RunCommand run{model, raw.experiment, raw.out, raw.jobs, {}, parse_duration(raw.time_limit), compile, raw.timings};
  if (raw.sample > 0) run.sample = raw.sample;
  return run;
}

std::string help_of(const CLI::App& command) { return fmt::format("`tarn {} --help` lists what there is", command.get_name()); }

/// The command that the first word names; the program itself for an option; null for an unknown word.
const CLI::App* command_named(const CLI::App& app, int argc, const char* const* argv) {
  const std::string_view first = argc > 1 ? argv[1] : "";
  if (first.starts_with('-')) return &app;
  for (const CLI::App* command : app.get_subcommands([](const CLI::App*) { return true; })) {
    if (command->get_name() == first) return command;
  }
  return nullptr;
}

WrongCommandLine unknown_command(const CLI::App& app, const std::string& word) {
  std::vector<std::string> names;
  for (const CLI::App* command : app.get_subcommands([](const CLI::App*) { return true; })) names.push_back(command->get_name());
  const std::vector<std::string_view> views(names.begin(), names.end());
  const std::string_view near = meant(word, views);
  const std::string remedy = near.empty() ? fmt::format("one of {}; `tarn --help` says what they do", fmt::join(names, ", "))
                                          : fmt::format("did you mean `{}`?", near);
  return {word.empty() ? "a command is needed" : fmt::format("there is no command `{}`", word), remedy};
}

/// What the command took for none of its own.
WrongCommandLine unknown_words(const CLI::App& command) {
  const std::vector<std::string> extras = command.get_name() == "tarn" ? command.remaining(true) : command.remaining();
  const std::string word = extras.empty() ? "" : extras.front();
  if (!word.starts_with('-')) return {fmt::format("`{}` is one argument too many", word), help_of(command)};
  std::vector<std::string> names;
  for (const CLI::Option* option : command.get_options()) {
    for (const std::string& name : option->get_lnames()) names.push_back("--" + name);
  }
  const std::vector<std::string_view> views(names.begin(), names.end());
  const std::string option = word.substr(0, word.find('='));
  const std::string_view near = meant(option, views);
  return {fmt::format("there is no option `{}`", option),
          near.empty() ? help_of(command) : fmt::format("did you mean `{}`?", near)};
}

}  // namespace

const std::vector<std::string>& emit_stages() {
  static const std::vector<std::string> kStages = {"syntax", "program", "instance", "plan",   "ir",
                                                   "llvm",   "asm",     "header",   "object"};
  return kStages;
}

bool asks_for_json(int argc, const char* const* argv) {
  for (int i = 1; i < argc; ++i) {
    const std::string_view word = argv[i];
    if (word == "--diagnostics=json") return true;
    if (word == "--diagnostics" && i + 1 < argc && std::string_view(argv[i + 1]) == "json") return true;
  }
  return false;
}

Command parse_command_line(int argc, const char* const* argv) {
  Raw raw;
  CLI::App app(kAbout, "tarn");
  app.set_version_flag("--version", std::string("tarn ") + kVersion);
  app.require_subcommand(1);
  add_commands(app, raw);
  const CLI::App* const command = command_named(app, argc, argv);
  if (command == nullptr) return unknown_command(app, argc > 1 ? argv[1] : "");
  try {
    app.parse(argc, argv);
  } catch (const CLI::CallForVersion& version) {
    return HelpCommand{std::string(version.what()) + "\n"};
  } catch (const CLI::CallForHelp&) {
    return HelpCommand{command->help(command == &app ? "" : "tarn")};
  } catch (const CLI::ExtrasError&) {
    return unknown_words(*command);
  } catch (const CLI::ParseError& error) {
    return WrongCommandLine{error.what(), help_of(*command)};
  }
  return build(app, raw);
}

}  // namespace tarn::compiler
