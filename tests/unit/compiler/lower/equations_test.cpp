// Comparisons, correlated copies, relaxation times and verdicts as the plan holds them, and the kernel's
// rows that it names. The plan is the project's own: no outside source.
#include <catch2/catch.hpp>
#include <algorithm>
#include <filesystem>

#include "compiler/lower/lower.h"
#include "compiler/passes/pipeline.h"
#include "runtime/plan/text.h"
#include "tests/unit/compiler/codegen/compiled.h"
#include "tests/unit/compiler/support/reference.h"
#include "tests/unit/compiler/whole/text_model.h"

using namespace tarn;
using namespace tarn::test;

namespace {

const std::string kModel = R"(
use spectra
parameter c = 0.5 in -1 .. 1
parameter blur = 2 ns
bath cold { density spectra.drude(strength = 1e-3, cutoff = 2 GHz) temperature 20 mK }
qubit site { energy -2 GHz*(1 - s)*X + 2 GHz*s*Z jump sqrt(1 [1/us]) * Z }
chip row {
    qubit q[i] : site for i in 0 .. 1
    noise shared X(q[0]), X(q[1]) ~ cold
    noise Z(q[i]) ~ cold for i in 0 .. 1 correlation(i, j) = c^abs(i - j)
}
experiment run {
    chip row
    begin steady
    pace ramp to 1 over 10 ns
    equation each of (davies, s = schroedinger, lindblad, w = coarse_grained(window = 3*blur), h = hierarchy(3), g = redfield(memory = growing, shift = off))
    observe p = population(ground) at end
    observe q = purity at end
    expect abs(q under w - p under h) < 0.1
    expect q - p under h < 0.1 where verdict under w == within
    expect p > 0
}
)";

/// Steady states want relaxation.
std::string model(const std::string& begin, const std::string& others) {
  std::string text = kModel;
  text.replace(text.find("begin steady"), 12, begin);
  const std::string written = "s = schroedinger, lindblad, ";
  text.replace(text.find(written), written.size(), others);
  return text;
}

TextModel checked(const std::string& text) { return text_model(text, std::filesystem::temp_directory_path()); }

bool has_line(const std::string& text, const std::string& line) { return text.find(line + "\n") != std::string::npos; }

}  // namespace

TEST_CASE("a plan for each equation, alike but for the equation and what it leaves out") {
  const TextModel made = checked(model("begin ground", "s = schroedinger, lindblad, "));
  const compiler::Lowered lowered = compiler::lower(made.instance, made.sources());
  const auto plans = compiler::plan_of_each(lowered.plan);
  REQUIRE(plans.size() == 6);
  for (std::size_t k = 0; k < plans.size(); ++k) {
    CHECK(plans[k].compared.size() == 6);
    CHECK(plans[k].choice.label == plans[k].compared[k].label);
    CHECK(plans[k].choice.equation == plans[k].compared[k].equation);
    CHECK(plans[k].points == lowered.plan.points);
  }
  CHECK(plans[0].left_out.empty());
  CHECK(plans[1].left_out.size() == 5);  // three copies of a bath and two jumps
  CHECK(plans[2].left_out.size() == 3);
  REQUIRE(plans[3].choice.window);
  CHECK(plans[4].choice.depth == 3);
  CHECK(plans[5].choice.memory == runtime::Memory::growing);
  CHECK_FALSE(plans[5].choice.lamb_shift);
  CHECK(lowered.module.generators.size() == 3);  // with the Liouvillian, since one of them wants it
}

TEST_CASE("without `each of` there is one plan and nothing is compared") {
  std::string text = model("begin ground", "");
  text.replace(text.find("each of (davies"), text.find("growing, shift = off))") + 22 - text.find("each of (davies"), "davies(shift = off)");
  for (int k = 0; k < 2; ++k) text.erase(text.find("    expect"), text.find('\n', text.find("    expect")) - text.find("    expect"));
  const TextModel made = checked(text);
  const compiler::Lowered lowered = compiler::lower(made.instance, made.sources());
  CHECK(lowered.plan.compared.empty());
  CHECK(lowered.plan.choice.label.empty());
  CHECK(lowered.plan.choice.equation == runtime::Equation::davies);
  CHECK_FALSE(lowered.plan.choice.lamb_shift);
  CHECK(compiler::plan_of_each(lowered.plan).size() == 1);
  CHECK(lowered.module.generators.size() == 2);
}

TEST_CASE("claims under a named equation read its slots in the kernel") {
  const TextModel made = checked(model("begin steady", ""));
  const compiler::Lowered lowered = compiler::lower(made.instance, made.sources());
  const runtime::Plan& plan = lowered.plan;
  CHECK(std::holds_alternative<runtime::BeginSteady>(*plan.begin));
  REQUIRE(plan.under.size() == 3);
  CHECK(plan.under[0].choice == 1);
  CHECK(plan.under[0].observable == 1);
  CHECK(plan.under[1].choice == 2);
  CHECK(plan.under[1].observable == 0);
  CHECK(plan.under_slot == plan.observable_slot + plan.observables.size());
  CHECK(lowered.module.inputs.size() == plan.under_slot + plan.under.size());
  REQUIRE(plan.claims.size() == 3);
  CHECK(plan.claims[0].under_all);
  std::vector<std::uint32_t> observables = plan.claims[0].observables;
  std::sort(observables.begin(), observables.end());
  CHECK(observables == std::vector<std::uint32_t>{0, 1});
  CHECK(plan.claims[0].under == std::vector<std::uint32_t>{0, 1});
  CHECK_FALSE(plan.claims[1].under_all);
  CHECK(plan.claims[1].under == std::vector<std::uint32_t>{1, 2});
  CHECK_FALSE(plan.claims[2].under_all);
  CHECK(plan.claims[2].under.empty());

  const ir::Module module = compiler::optimize(lowered.module);
  const runtime::Kernel kernel = compiled(module);
  runtime::InputBlock block(kernel, numbers_of(module));
  for (std::uint32_t slot = 0; slot < module.inputs.size(); ++slot) block.set(slot, 0);
  block.set(plan.observable_slot + 1, 0.7);  // q of the equation judged
  block.set(plan.under_slot, 0.9);           // q under w
  block.set(plan.under_slot + 1, 0.4);       // p under h
  const double none = 0;
  std::vector<double> sides(kernel.rows(runtime::kClaims));
  REQUIRE(kernel.values(runtime::kClaims)(block.block(), 1, &none, &none, &none, sides.data()) == TARN_OK);
  CHECK(sides[plan.claims[0].holds.lhs] == Approx(0.5));
  CHECK(sides[plan.claims[1].holds.lhs] == Approx(0.3));
}

TEST_CASE("the settings of correlated copies and of a window") {
  const TextModel made = checked(model("begin steady", ""));
  const compiler::Lowered lowered = compiler::lower(made.instance, made.sources());
  REQUIRE(lowered.plan.chip.correlations.size() == 1);
  const runtime::Correlation& correlation = lowered.plan.chip.correlations[0];
  CHECK(correlation.first == 1);
  CHECK(correlation.count == 2);
  REQUIRE(correlation.elements.size() == 4);
  const ir::Module module = compiler::optimize(lowered.module);
  const runtime::Kernel kernel = compiled(module);
  runtime::InputBlock block(kernel, numbers_of(module));
  for (const runtime::Parameter& parameter : lowered.plan.parameters) block.set(parameter.slot, parameter.name == "c" ? -0.25 : 2);
  const double none = 0;
  std::vector<double> settings(kernel.rows(runtime::kSettings));
  REQUIRE(kernel.values(runtime::kSettings)(block.block(), 1, &none, &none, &none, settings.data()) == TARN_OK);
  for (std::size_t k = 0; k < 4; ++k) CHECK(settings[correlation.elements[k]] == (k == 0 || k == 3 ? 1 : -0.25));
  CHECK(settings[lowered.plan.compared[1].window->row] == 6);
}

TEST_CASE("the plan's text shows equations, correlated copies, slots and what is measured") {
  std::string text = model("begin steady", "");
  text.replace(text.rfind("    expect p > 0"), 16, "    observe life = T1 at end\n    observe v = verdict along 5\n    observe r = T2(1, 2) at end\n    levels auto");
  text.replace(text.find("h = hierarchy(3)"), 16, "h = universal");
  const TextModel made = checked(text);
  const std::string shown = runtime::to_text(compiler::lower(made.instance, made.sources()).plan);
  INFO(shown);
  CHECK(has_line(shown, "equation davies = davies"));
  CHECK(has_line(shown, "  one of h = universal"));
  CHECK(has_line(shown, "  one of g = redfield, memory growing, shift off"));
  CHECK(shown.find("  one of w = coarse_grained, window setting ") != std::string::npos);
  CHECK(has_line(shown, "levels auto"));
  CHECK(has_line(shown, "begin steady"));
  CHECK(shown.find("  correlation of noise 1 .. 2: settings ") != std::string::npos);
  CHECK(shown.find(": observable 1 under w\n") != std::string::npos);
  CHECK(shown.find(": T1\n") != std::string::npos);
  CHECK(shown.find(": T2 of levels 1 and 2\n") != std::string::npos);
  CHECK(shown.find(": verdict\n") != std::string::npos);
  CHECK(shown.find("expect abs(q under w - p under h) < 0.1, once a point\n") != std::string::npos);
}
