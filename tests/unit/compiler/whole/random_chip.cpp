#include "tests/unit/compiler/whole/random_chip.h"

#include <algorithm>
#include <cmath>
#include <fmt/format.h>

namespace tarn::test {
namespace {

using Eigen::Matrix2cd;
using Eigen::MatrixXcd;
using Coefficient = std::function<double(double, double)>;

const double kGHz = 2 * std::acos(-1.0);  // rad/ns
double drive(double s) { return 6 * kGHz * (1 - s) * (1 - s); }
double problem(double s) { return 9 * kGHz * s + 0.3 * kGHz; }

Matrix2cd letter(char name) {
  using C = std::complex<double>;
  Matrix2cd m = Matrix2cd::Identity();
  if (name == 'X') m << 0, 1, 1, 0;
  if (name == 'Y') m << 0, C(0, -1), C(0, 1), 0;
  if (name == 'Z') m << 1, 0, 0, -1;
  return m;
}

/// |row><column|
Matrix2cd unit_matrix(int row, int column) {
  Matrix2cd m = Matrix2cd::Zero();
  m(row, column) = 1;
  return m;
}

/// A number as it stands in the text.
struct Number {
  std::string text;
  double value;
};

const char* const kKinds = R"(
parameter g : number = 0.5 in -3 .. 3
parameter f = 1 GHz in 0.1 GHz .. 9 GHz
schedule A(s) = 6 GHz*(1 - s)^2
schedule B(s) = 9 GHz*s + 0.3 GHz
qubit site(h : number) {
    let half = h/2
    energy -A(s)/2*X + half*B(s)*Z
    energy g*h*1 GHz*Y
}
qubit driven(h : number) {
    energy h*1 GHz*|1><1| + g*0.2 GHz*(|0><1| + |1><0|)
    energy A(s)*cos(f*t)*X + 0.1 GHz*(X + Z)^2 - 0.3 GHz*X*Z*X
}
coupler link(J : number) { energy J*sqrt(B(s1)*B(s2))*ZZ }
coupler cross(J : number) { energy J*A(s)*XY + g*J*0.5 GHz*(XX + YY) }
coupler hop(J : number) { energy J*B(s2)*(|01><10| + |10><01|) - J*1 GHz*|11><11| }
)";

class Builder {
 public:
  Builder(unsigned seed, double g, double f) : random_(seed), g_(g), f_(f) {}

  RandomChip build() {
    const std::size_t cell = 1 + pick(3), cells = pick(3);
    const std::size_t front = pick(std::min<std::size_t>(4, 9 - cell * cells));
    const std::size_t back = front + cell * cells == 0 ? 1 + pick(2) : pick(std::min<std::size_t>(3, 9 - front - cell * cells));
    std::string top;
    if (front > 0) top += front_qubits(front);
    if (cells > 0) top += nested(cell, cells);
    for (std::size_t k = 0; k < back; ++k) top += single_qubit(fmt::format("b{}", k), "driven");
    chip_.qubits = names_.size();
    top += pairs();
    top += words();
    if (chip_.qubits > 1) top += exchange();
    chip_.text = kKinds + cell_text_ + "chip whole {\n" + top + "}\nexperiment run { chip whole scan s over linear(0, 1, 3) observe lowest_level = E(0) }\n";
    return std::move(chip_);
  }

 private:
  std::size_t pick(std::size_t below) { return std::uniform_int_distribution<std::size_t>(0, below - 1)(random_); }
  Number number(double low, double high) {
    const std::string text = fmt::format("{:.3f}", std::uniform_real_distribution<double>(low, high)(random_));
    return {text[0] == '-' ? "(" + text + ")" : text, std::stod(text)};
  }
  void add(Coefficient coefficient, std::map<std::size_t, Matrix2cd> factors) {
    chip_.terms.push_back({std::move(coefficient), std::move(factors)});
  }

  void place(const std::string& name, const std::string& kind, double h, double offset) {
    const std::size_t q = names_.size();
    names_.push_back(name);
    offsets_.push_back(offset);
    const double g = g_, f = f_;
    const auto local = [offset](double s) { return std::clamp(s + offset, 0.0, 1.0); };
    if (kind == "site") {
      add([local](double s, double) { return -drive(local(s)) / 2; }, {{q, letter('X')}});
      add([local, h](double s, double) { return h / 2 * problem(local(s)); }, {{q, letter('Z')}});
      add([g, h](double, double) { return g * h * kGHz; }, {{q, letter('Y')}});
      return;
    }
    const Matrix2cd sum = letter('X') + letter('Z');
    add([h](double, double) { return h * kGHz; }, {{q, unit_matrix(1, 1)}});
    add([g](double, double) { return g * 0.2 * kGHz; }, {{q, unit_matrix(0, 1) + unit_matrix(1, 0)}});
    add([local, f](double s, double t) { return drive(local(s)) * std::cos(f * t); }, {{q, letter('X')}});
    add([](double, double) { return 0.1 * kGHz; }, {{q, sum * sum}});
    add([](double, double) { return -0.3 * kGHz; }, {{q, letter('X') * letter('Z') * letter('X')}});
  }

  void join(const std::string& kind, std::size_t a, std::size_t b, double J) {
    const double g = g_, xa = offsets_[a], xb = offsets_[b];
    const auto end = [](double s, double x) { return std::clamp(s + x, 0.0, 1.0); };
    if (kind == "link") {
      add([=](double s, double) { return J * std::sqrt(problem(end(s, xa)) * problem(end(s, xb))); }, {{a, letter('Z')}, {b, letter('Z')}});
    } else if (kind == "cross") {
      add([=](double s, double) { return J * drive(s); }, {{a, letter('X')}, {b, letter('Y')}});
      for (const char name : {'X', 'Y'}) add([=](double, double) { return g * J * 0.5 * kGHz; }, {{a, letter(name)}, {b, letter(name)}});
    } else {
      const auto hop = [=](double s, double) { return J * problem(end(s, xb)); };
      add(hop, {{a, unit_matrix(0, 1)}, {b, unit_matrix(1, 0)}});
      add(hop, {{a, unit_matrix(1, 0)}, {b, unit_matrix(0, 1)}});
      add([=](double, double) { return -J * kGHz; }, {{a, unit_matrix(1, 1)}, {b, unit_matrix(1, 1)}});
    }
  }

  std::string single_qubit(const std::string& name, const std::string& kind) {
    const Number h = number(-1, 1), x = number(-0.3, 0.3);
    const bool shifted = pick(2) == 0;
    place(name, kind, h.value, shifted ? x.value : 0);
    return fmt::format("    qubit {} : {}(h = {}){}\n", name, kind, h.text, shifted ? " offset " + x.text : "");
  }

  std::string front_qubits(std::size_t count) {
    const Number h = number(-1, 1), x = number(-0.2, 0.2), J = number(-1, 1);
    for (std::size_t i = 0; i < count; ++i) {
      const auto k = static_cast<double>(i);
      place(fmt::format("a[{}]", i), "site", h.value + 0.1 * k, x.value * k);
    }
    for (std::size_t i = 0; i < count; ++i) {
      for (std::size_t j = i + 1; j < count; ++j) {
        if ((i + j) % 2 == 1) join("link", i, j, J.value * static_cast<double>(j) - 0.3);
      }
    }
    return fmt::format("    qubit a[i] : site(h = {} + 0.1*i) offset {}*i for i in 0 .. {}\n"
                       "    coupler a[i] -- a[j] : link(J = {}*j - 0.3) for i in 0 .. {} for j in i+1 .. {} where mod(i + j, 2) == 1\n",
                       h.text, x.text, count - 1, J.text, static_cast<int>(count) - 2, count - 1);
  }

  /// A chip `cell` with a chain of qubits and a word of its own, placed `count` times.
  std::string nested(std::size_t size, std::size_t count) {
    const Number h = number(-1, 1), J = number(-1, 1), c = number(-2, 2);
    const std::string word = random_word(size);
    cell_text_ = fmt::format("chip cell(more : number) {{\n    qubit q[i] : site(h = {} + more) for i in 0 .. {}\n"
                             "    coupler q[i] -- q[i+1] : hop(J = {}*(i + 1)) for i in 0 .. {}\n    energy {}*A(s)*{}({})\n}}\n",
                             h.text, size - 1, J.text, static_cast<int>(size) - 2, c.text, word, listed("q", size));
    for (std::size_t k = 0; k < count; ++k) {
      const std::size_t first = names_.size();
      for (std::size_t i = 0; i < size; ++i) place(fmt::format("part[{}].q[{}]", k, i), "site", h.value + 0.25 * static_cast<double>(k), 0);
      for (std::size_t i = 0; i + 1 < size; ++i) join("hop", first + i, first + i + 1, J.value * static_cast<double>(i + 1));
      std::map<std::size_t, Matrix2cd> factors;
      for (std::size_t i = 0; i < size; ++i) factors[first + i] = letter(word[i]);
      add([v = c.value](double s, double) { return v * drive(s); }, factors);
    }
    return fmt::format("    chip part[k] : cell(more = 0.25*k) for k in 0 .. {}\n", count - 1);
  }

  static std::string listed(const std::string& name, std::size_t count) {
    std::string text;
    for (std::size_t i = 0; i < count; ++i) text += (i > 0 ? ", " : "") + fmt::format("{}[{}]", name, i);
    return text;
  }

  std::string random_word(std::size_t size) {
    std::string word;
    for (std::size_t i = 0; i < size; ++i) word += "XYZ"[pick(3)];
    return word;
  }

  /// `cross` on some pairs anywhere, in either direction.
  std::string pairs() {
    std::string text;
    for (std::size_t a = 0; a < names_.size(); ++a) {
      for (std::size_t b = a + 1; b < names_.size(); ++b) {
        if (pick(4) != 0) continue;
        const Number J = number(-1, 1);
        const bool turned = pick(2) == 0;
        const std::size_t left = turned ? b : a, right = turned ? a : b;
        join("cross", left, right, J.value);
        text += fmt::format("    coupler {} -- {} : cross({})\n", names_[left], names_[right], J.text);
      }
    }
    return text;
  }

  /// Terms of the chip itself: words on places in any order.
  std::string words() {
    std::string text;
    for (std::size_t k = 0; k < 3; ++k) {
      std::vector<std::size_t> order(names_.size());
      for (std::size_t i = 0; i < order.size(); ++i) order[i] = i;
      std::shuffle(order.begin(), order.end(), random_);
      order.resize(1 + pick(std::min<std::size_t>(4, order.size())));
      const std::string word = random_word(order.size());
      const Number c = number(-2, 2);
      std::map<std::size_t, Matrix2cd> factors;
      std::string places;
      for (std::size_t i = 0; i < order.size(); ++i) {
        factors[order[i]] = letter(word[i]);
        places += (i > 0 ? ", " : "") + names_[order[i]];
      }
      const double f = f_;
      add([v = c.value, f](double s, double) { return v * s * f; }, factors);
      text += fmt::format("    energy {}*s*f*{}({})\n", c.text, word, places);
    }
    return text;
  }

  /// A term of the chip itself that swaps an excitation between its last and its first qubit.
  std::string exchange() {
    const std::size_t a = names_.size() - 1, b = 0;
    const Number c = number(-2, 2);
    const auto coefficient = [v = c.value](double s, double) { return v * s * kGHz; };
    add(coefficient, {{a, unit_matrix(0, 1)}, {b, unit_matrix(1, 0)}});
    add(coefficient, {{a, unit_matrix(1, 0)}, {b, unit_matrix(0, 1)}});
    const std::string places = "(" + names_[a] + ", " + names_[b] + ")";
    return fmt::format("    energy {}*s*1 GHz*(|01><10|{} + |10><01|{})\n", c.text, places, places);
  }

  std::mt19937 random_;
  double g_, f_;
  RandomChip chip_;
  std::string cell_text_;
  std::vector<std::string> names_;
  std::vector<double> offsets_;
};

MatrixXcd kronecker(const MatrixXcd& a, const Matrix2cd& b) {
  MatrixXcd result(2 * a.rows(), 2 * a.cols());
  for (Eigen::Index i = 0; i < a.rows(); ++i) {
    for (Eigen::Index j = 0; j < a.cols(); ++j) result.block<2, 2>(2 * i, 2 * j) = a(i, j) * b;
  }
  return result;
}

}  // namespace

RandomChip random_chip(unsigned seed, double g, double f) { return Builder(seed, g, f).build(); }

MatrixXcd matrix_of(const RandomChip& chip, double s, double t) {
  const auto size = Eigen::Index{1} << chip.qubits;
  MatrixXcd sum = MatrixXcd::Zero(size, size);
  for (const ProductTerm& term : chip.terms) {
    MatrixXcd product = MatrixXcd::Constant(1, 1, term.coefficient(s, t));
    for (std::size_t q = 0; q < chip.qubits; ++q) {
      const auto found = term.factors.find(q);
      product = kronecker(product, found == term.factors.end() ? Matrix2cd::Identity() : found->second);
    }
    sum += product;
  }
  return sum;
}

}  // namespace tarn::test
