#include "tests/unit/compiler/whole/random_expression.h"

#include <array>
#include <fmt/format.h>

namespace tarn::test {

const char* const kDeclarations = R"(
parameter p0 : number = 0.37 in -2 .. 2
parameter p1 : number = -0.81 in -2 .. 2
parameter p2 : number = 1.45 in 0.1 .. 3
parameter pf = 1.3 GHz in 0.2 GHz .. 5 GHz
parameter pT = 40 mK in 10 mK .. 300 mK
function blend(x : number, y : number, share : number = 0.25) : number = (1 - share)*x + share*y
function ratio(f : frequency, T : temperature) = tanh(hbar*f/(2*kB*T))
function steep(x : number) = if x < 0 then -x^2 else sqrt(x + 0.5)
schedule straight(s) = table("tables.csv", "x", "y", by = "linear")
schedule shaped(s) = table("tables.csv", "x", "y", by = "monotone")
schedule smooth(s, scale : number) = scale*table("tables.csv", "x", "y", by = "spline")
schedule power(s) = table("tables.csv", "x", "z", by = "loglog")
)";

const char* const kTables =
    "# invented numbers\nx,y,z\n0.05,0.2,0.011\n0.13,0.7,0.034\n0.3,0.65,0.4\n0.42,1.3,0.9\n0.71,1.31,0.7\n"
    "0.9,0.4,2.5\n0.97,0.1,3.1\n";

std::string ExpressionWriter::constant() {
  return fmt::format("{:.4f}", std::uniform_real_distribution<double>(0.05, 2.5)(random_));
}

std::string ExpressionWriter::leaf() {
  switch (pick(with_time_ ? 10 : 9)) {
    case 0: return constant();
    case 1: return fmt::format("{}", pick(5));
    case 2: return "p0";
    case 3: return "p1";
    case 4: return "p2";
    case 5: return "pf/1.7 GHz";
    case 6: return "ratio(pf, T = pT)";
    case 7: case 8: return "s";
    default: return fmt::format("sin({}*pf*t)", constant());
  }
}

std::string ExpressionWriter::truth(int depth) {
  static constexpr std::array<const char*, 4> kOrder{"<", "<=", ">", ">="};
  const auto sub = [&] { return number(depth - 1); };
  switch (depth > 1 ? pick(7) : pick(3)) {
    case 0: case 1: case 2: return fmt::format("{} {} {}", sub(), kOrder[pick(4)], sub());
    case 3: return fmt::format("({} and {})", truth(depth - 1), truth(depth - 1));
    case 4: return fmt::format("({} or {})", truth(depth - 1), truth(depth - 1));
    case 5: return fmt::format("not ({})", truth(depth - 1));
    default: return fmt::format("floor(3*({})) {} {}", sub(), pick(2) == 0 ? "==" : "!=", pick(3));
  }
}

std::string ExpressionWriter::binary(int depth) {
  const auto sub = [&] { return number(depth - 1); };
  switch (pick(13)) {
    case 0: return fmt::format("({} + {})", sub(), sub());
    case 1: return fmt::format("({} - {})", sub(), sub());
    case 2: return fmt::format("{}*({})", sub(), sub());
    case 3: return fmt::format("({})/(1 + ({})^2)", sub(), sub());
    case 4: return fmt::format("min({}, {})", sub(), sub());
    case 5: return fmt::format("max({}, {})", sub(), sub());
    case 6: return fmt::format("mod({}, {})", sub(), constant());
    case 7: return fmt::format("mod({}, -0.3 - ({})^2)", sub(), sub());
    case 8: return fmt::format("(0.4 + abs({}))^sin(({})*1 rad)", sub(), sub());
    case 9: return fmt::format("clamp({}, {}, {} + 2.6)", sub(), constant(), constant());
    case 10: return fmt::format("blend({}, {})", sub(), sub());
    case 11: return fmt::format("blend(y = {}, x = {}, share = {})", sub(), sub(), constant());
    default: return fmt::format("(if {} then {} else {})", truth(depth - 1), sub(), sub());
  }
}

std::string ExpressionWriter::unary(int depth) {
  const std::string x = number(depth - 1);
  switch (pick(27)) {
    case 0: return fmt::format("(-{})", x);
    case 1: return fmt::format("exp(-({})^2)", x);
    case 2: return fmt::format("exp(clamp({}, -3, 1))", x);
    case 3: return fmt::format("ln(0.3 + abs({}))", x);
    case 4: return fmt::format("log10(0.7 + ({})^2)", x);
    case 5: return fmt::format("sqrt(0.2 + ({})^2)", x);
    case 6: return fmt::format("sin(({})*1 rad)", x);
    case 7: return fmt::format("cos(({})*0.3 cycle)", x);
    case 8: return fmt::format("tan(1.2*tanh({})*1 rad)", x);
    case 9: return fmt::format("asin(0.9*sin(({})*1 rad))/1 rad", x);
    case 10: return fmt::format("acos(0.95*tanh({}))/1 rad", x);
    case 11: return fmt::format("atan(2*({}))/1 rad", x);
    case 12: return fmt::format("sinh(sin(({})*1 rad))", x);
    case 13: return fmt::format("cosh(tanh({}))", x);
    case 14: return fmt::format("tanh({})", x);
    case 15: return fmt::format("abs({})", x);
    case 16: return fmt::format("floor(2.3*({}))", x);
    case 17: return fmt::format("steep({})", x);
    case 18: return fmt::format("straight({})", x);
    case 19: return fmt::format("shaped({})", x);
    case 20: return fmt::format("smooth({}, scale = {})", x, constant());
    case 21: return fmt::format("power({})", x);
    case 22: return fmt::format("straight(s + 0.1*sin(({})*1 rad))", x);
    case 23: return fmt::format("smooth(1 - s, {})", x);
    case 24: return fmt::format("-({})^{}", x, pick(4));
    case 25: return fmt::format("({})^3^0", x);
    default: return fmt::format("mod(({})^2, 1.5)", x);
  }
}

std::string ExpressionWriter::number(int depth) {
  if (depth <= 0 || pick(10) == 0) return leaf();
  return pick(2) == 0 ? binary(depth) : unary(depth);
}

}  // namespace tarn::test
