// The reference of the language says what is so: its models check, its grammar has every word,
// and what it lists as not available is refused.
#include <catch2/catch.hpp>

#include <algorithm>
#include <map>
#include <sstream>
#include <string>
#include <utility>
#include <vector>

#include "tests/program/process.h"

using namespace tarn::testing;

namespace {

std::string reference() { return read_file(source_root() / "lang" / "REFERENCE.md"); }

/// A whole model of the reference with the tables shown since the model before it.
struct Model {
  std::size_t line = 0;  ///< Of its opening fence, from 1.
  std::string text;
  std::map<std::string, std::string> tables;
};

/// The name in a line "File `curves.csv`:"; empty if the line is another one.
std::string table_name(const std::string& line) {
  const std::string head = "File `", tail = "`:";
  if (line.rfind(head, 0) != 0 || line.size() <= head.size() + tail.size()) return "";
  return line.substr(head.size(), line.size() - head.size() - tail.size());
}

std::vector<Model> models_of(const std::string& text) {
  std::vector<Model> models;
  Model next;
  std::string line, fence, content, name;
  std::istringstream lines(text);
  for (std::size_t number = 1; std::getline(lines, line); ++number) {
    if (line.rfind("```", 0) != 0) {
      if (!fence.empty()) content += line + "\n";
      if (fence.empty() && !line.empty()) name = table_name(line);
      continue;
    }
    if (fence.empty()) {
      fence = line;
      next.line = number;
      content.clear();
      continue;
    }
    if (fence == "```csv") {
      INFO("line " << number);
      REQUIRE_FALSE(name.empty());
      next.tables[name] = content;
    } else if (fence == "```tarn") {
      next.line = number - static_cast<std::size_t>(std::count(content.begin(), content.end(), '\n')) - 1;
      next.text = content;
      models.push_back(std::exchange(next, {}));
    }
    fence.clear();
  }
  REQUIRE(fence.empty());
  return models;
}

Outcome check_model(const Model& model) {
  const Scratch scratch;
  scratch.write("model.tarn", model.text);
  for (const auto& [name, table] : model.tables) scratch.write(name, table);
  return run_tarn({"check", "model.tarn"}, scratch.path());
}

/// A small model; each part may be replaced.
struct Parts {
  std::string bath = "density spectra.ohmic(strength = 1e-3, cutoff = 8 GHz) temperature 15 mK";
  std::string noise = "noise Z(q[i]) ~ cold for i in 0 .. 1";
  std::string argument = "h : frequency = 1 GHz";
  std::string begin = "begin ground";
  std::string equation = "equation davies";
  std::string more;

  Model model() const {
    return {0,
            "use spectra\nbath cold { " + bath + " }\nqubit site(" + argument +
                ") { energy -1 GHz/2*X + h/2*Z }\nchip pair { qubit q[i] : site for i in 0 .. 1 " + noise +
                " }\nexperiment trial { chip pair " + begin + " pace hold for 1 ns " + equation +
                " observe x = population(ground) at end " + more + " }\n",
            {}};
  }
};

/// What the section of that heading says, up to the next heading.
std::string section(const std::string& text, const std::string& heading) {
  const std::size_t from = text.find("\n## " + heading);
  REQUIRE(from != std::string::npos);
  const std::size_t to = text.find("\n## ", from + 1);
  return text.substr(from, to == std::string::npos ? to : to - from);
}

}  // namespace

TEST_CASE("every model of the reference checks without a warning") {
  const std::vector<Model> models = models_of(reference());
  REQUIRE(models.size() >= 5);
  for (const Model& model : models) {
    const Outcome outcome = check_model(model);
    INFO("lang/REFERENCE.md, line " << model.line << "\n" << outcome.err);
    CHECK(outcome.status == 0);
    CHECK(outcome.err.find("warning[") == std::string::npos);
  }
}

TEST_CASE("the grammar of the reference has every word of the language") {
  const std::string grammar = section(reference(), "15 Grammar");
  std::istringstream text(grammar.substr(0, grammar.find("```")));
  std::string listed;
  for (std::string word; text >> word;) listed += " " + word + " ";
  const auto in_list = [&](const std::string& word) { return listed.find(" " + word + " ") != std::string::npos; };
  const std::vector<std::string> reserved = {
#define TARN_RESERVED(id, text) text,
#include "lang/syntax/tokens.def"
  };
  for (const std::string& word : reserved) {
    INFO(word);
    CHECK(in_list(word));
    CHECK(grammar.find("\"" + word + "\"") != std::string::npos);
  }
  const std::vector<std::string> soft = {
#define TARN_SOFT(id, text) text,
#include "lang/syntax/tokens.def"
  };
  for (const std::string& word : soft) {
    INFO(word);
    CHECK(grammar.find("'" + word + "'") != std::string::npos);
  }
}

TEST_CASE("what the reference lists as not available is refused") {
  const std::string listed = section(reference(), "14 Not available yet");
  const Outcome whole = check_model(Parts{}.model());
  INFO(whole.err);
  REQUIRE(whole.status == 0);

  struct Case {
    std::string shown;  ///< As the reference writes it.
    Parts parts;
  };
  std::vector<Case> cases;
  const auto add = [&](const std::string& shown, auto change) {
    Parts parts;
    change(parts);
    cases.push_back({shown, parts});
  };
  for (const char* equation : {"equation hybrid(split = 1 MHz)", "equation blip"}) {
    add(equation, [&](Parts& p) { p.equation = equation; });
  }
  for (const char* statement : {"levels auto", "trajectories 200 seed 1", "freeze 100 seed 1",
                                "ensemble 100 seed 1"}) {
    add(statement, [&](Parts& p) { p.more = statement; });
  }
  for (const char* value : {"rate(from = level(1), to = ground)", "effective_temperature"}) {
    add(value, [&](Parts& p) { p.more = std::string("observe y = ") + value + " at end"; });
  }
  add("population(ground when q is \"1\")",
      [](Parts& p) { p.more = "observe y = population(ground when q[0] is \"1\") at end"; });
  add("spread + normal(5 MHz)", [](Parts& p) { p.argument += " spread + normal(5 MHz)"; });
  for (const char* setting : {"band 1 MHz .. 1 GHz", "width 10 MHz", "shift 10 MHz"}) {
    add(setting, [&](Parts& p) { p.bath += std::string(" ") + setting; });
  }

  for (const Case& one : cases) {
    const Outcome outcome = check_model(one.parts.model());
    INFO(one.shown << "\n" << outcome.err);
    CHECK(listed.find(one.shown) != std::string::npos);
    CHECK(outcome.status == 2);
    CHECK(outcome.err.find("error[not_available]") != std::string::npos);
  }
}
