#include "hand_kernels.h"

#include <bit>
#include <cmath>
#include <complex>
#include <functional>

namespace hand {
namespace {

using namespace tarn::runtime;
using Complex = std::complex<double>;

constexpr std::size_t kLanes = 8;
constexpr std::size_t kSets = 6;

struct Generator {
  std::uint32_t bits;
  OperatorSum sum;
};

struct Model {
  std::function<void(const double* in, double s, double t, double* out)> coefficients;
  std::function<void(const double* in, double s, double* out)> slopes;
  std::uint32_t coefficient_rows;
  std::vector<Generator> generators;
};

// ---- operators as sums of words ----

/// Elements of a word, straight from its definition.
Complex element(const PauliWord& word, std::uint64_t i) {
  const Complex powers[] = {1, Complex(0, 1), -1, Complex(0, -1)};
  return powers[std::popcount(word.x & word.z) % 4] * (std::popcount(word.z & i) % 2 ? -1.0 : 1.0);
}

using Matrix = Eigen::MatrixXcd;

Matrix matrix_of(const std::vector<WordTerm>& terms, std::uint32_t bits) {
  const auto size = Eigen::Index{1} << bits;
  Matrix m = Matrix::Zero(size, size);
  for (const WordTerm& term : terms) {
    for (Eigen::Index i = 0; i < size; ++i) {
      m(i ^ static_cast<Eigen::Index>(term.word.x), i) += term.factor * element(term.word, static_cast<std::uint64_t>(i));
    }
  }
  return m;
}

/// Every matrix is a sum of words: the factor is Tr(word m)/N.
std::vector<WordTerm> words_of(const Matrix& m, std::uint32_t bits) {
  std::vector<WordTerm> terms;
  const std::uint64_t size = std::uint64_t{1} << bits;
  for (std::uint64_t x = 0; x < size; ++x) {
    for (std::uint64_t z = 0; z < size; ++z) {
      Complex trace = 0;
      for (std::uint64_t i = 0; i < size; ++i) {
        trace += element({x, z}, i) * m(static_cast<Eigen::Index>(i), static_cast<Eigen::Index>(i ^ x));
      }
      if (std::abs(trace) > 1e-14) terms.push_back({trace / static_cast<double>(size), {x, z}});
    }
  }
  return terms;
}

Matrix kron(const Matrix& a, const Matrix& b) {
  Matrix out(a.rows() * b.rows(), a.cols() * b.cols());
  for (Eigen::Index i = 0; i < a.rows(); ++i)
    for (Eigen::Index j = 0; j < a.cols(); ++j) out.block(i * b.rows(), j * b.cols(), b.rows(), b.cols()) = a(i, j) * b;
  return out;
}

OperatorSum scaled(const OperatorSum& sum, Complex factor) {
  OperatorSum out = sum;
  for (OperatorGroup& group : out.groups)
    for (WordTerm& term : group.terms) term.factor *= factor;
  return out;
}

/// -i [h, rho] with rho as a vector, its row index in the upper bits.
OperatorGroup commutator(const OperatorGroup& h, std::uint32_t bits) {
  const Matrix m = matrix_of(h.terms, bits), one = Matrix::Identity(m.rows(), m.cols());
  return {h.coefficient, words_of(Complex(0, -1) * (kron(m, one) - kron(one, m.transpose())), 2 * bits)};
}

OperatorGroup dissipator(std::uint32_t row, const Matrix& l, std::uint32_t bits) {
  const Matrix one = Matrix::Identity(l.rows(), l.cols()), n = l.adjoint() * l;
  const Matrix d = kron(l, l.conjugate()) - 0.5 * (kron(n, one) + kron(one, n.transpose()));
  return {row, words_of(d, 2 * bits)};
}

// ---- the two models ----

OperatorSum one_qubit_hamiltonian() { return {{{0, {{1, {1, 0}}}}, {1, {{1, {0, 1}}}}}}; }

OperatorSum two_qubit_hamiltonian() {
  return {{{0, {{1, {2, 0}}, {0.8, {1, 0}}}}, {1, {{0.3, {0, 2}}, {-0.5, {0, 1}}, {1, {0, 3}}}}}};
}

OperatorSum two_qubit_drive() { return {{{2, {{1, {3, 2}}}}}}; }

Model make_one_qubit() {
  Model model;
  model.coefficient_rows = 4;
  model.coefficients = [](const double* in, double s, double, double* out) {
    out[0] = -in[0] / 2;
    out[1] = -in[1] / 2 * (2 * s - 1);
    out[2] = in[2];
    out[3] = 1;
  };
  model.slopes = [](const double* in, double, double* out) {
    out[0] = out[2] = out[3] = 0;
    out[1] = -in[1];
  };
  const OperatorSum h = one_qubit_hamiltonian();
  Matrix lower = Matrix::Zero(2, 2);
  lower(0, 1) = 1;
  const OperatorSum liouvillian{{commutator(h.groups[0], 1), commutator(h.groups[1], 1), dissipator(2, lower, 1)}};
  model.generators = {{1, h}, {1, scaled(h, Complex(0, -1))}, {2, liouvillian}};
  return model;
}

Model make_two_qubits() {
  Model model;
  model.coefficient_rows = 4;
  model.coefficients = [](const double* in, double s, double t, double* out) {
    out[0] = -(1 - s) * in[0];
    out[1] = in[1] * s;
    out[2] = 0.1 * in[2] * std::sin(t);
    out[3] = 1;
  };
  model.slopes = [](const double* in, double, double* out) {
    out[0] = in[0];
    out[1] = in[1];
    out[2] = out[3] = 0;
  };
  OperatorSum h = two_qubit_hamiltonian();
  h.groups.push_back(two_qubit_drive().groups.front());
  model.generators = {{2, h}, {2, scaled(h, Complex(0, -1))}};
  return model;
}

OperatorSum ring_hamiltonian() {
  OperatorSum sum{{{0, {}}, {1, {}}}};
  for (std::uint32_t q = 0; q < 9; ++q) {
    sum.groups[0].terms.push_back({1, {std::uint64_t{1} << q, 0}});
    sum.groups[1].terms.push_back({1, {0, (std::uint64_t{1} << q) | (std::uint64_t{1} << ((q + 1) % 9))}});
  }
  return sum;
}

Model make_ring() {
  Model model;
  model.coefficient_rows = 4;
  model.coefficients = [](const double* in, double s, double, double* out) {
    out[0] = -(1 - s) * in[0];
    out[1] = -s * in[1];
    out[2] = out[3] = 1;
  };
  model.slopes = [](const double* in, double, double* out) {
    out[0] = in[0];
    out[1] = -in[1];
    out[2] = out[3] = 0;
  };
  model.generators = {{9, ring_hamiltonian()}, {9, scaled(ring_hamiltonian(), Complex(0, -1))}};
  return model;
}

template <int M>
const Model& model() {
  static const Model made = M == 0 ? make_one_qubit() : M == 1 ? make_two_qubits() : make_ring();
  return made;
}

// ---- entries ----

constexpr std::uint32_t kRows[kSets] = {0, 7, 6, 7, 1, 1};

void plain_rows(int set, const double* in, double s, double w, double* out) {
  if (set == kSettings) {
    const double rows[] = {in[kTa], 0, 1, 0.5, in[0], in[1], in[2]};
    std::copy(rows, rows + 7, out);
  } else if (set == tarn::runtime::kObservables) {
    std::copy(in + kReadings, in + kReadings + 4, out);
    out[4] = in[kReadings] - in[kReadings + 1];
    out[5] = std::log(in[kReadings]);
  } else if (set == kClaims) {
    std::copy(in + hand::kObservables, in + hand::kObservables + 4, out);
    out[4] = in[kTa];
    out[5] = 0.5;
    out[6] = in[0];
  } else {
    out[0] = set == kKinks ? s : 1e-3 * w * std::exp(-w / 50);
  }
}

template <int M, int Set, bool Slope>
tarn_status values(const tarn_block* block, size_t count, const double* s, const double* t, const double* w, double* out) {
  const std::uint32_t rows = Set == kCoefficients ? model<M>().coefficient_rows : kRows[Set];
  std::vector<double> in(kInputs), row(rows);
  bool finite = true;
  for (std::size_t p = 0; p < count; ++p) {
    for (std::size_t i = 0; i < kInputs; ++i) in[i] = block->inputs[i * kLanes + p % kLanes];
    if constexpr (Set == kCoefficients && Slope) model<M>().slopes(in.data(), s[p], row.data());
    else if constexpr (Set == kCoefficients) model<M>().coefficients(in.data(), s[p], t[p], row.data());
    else plain_rows(Set, in.data(), s[p], w[p], row.data());
    for (std::uint32_t r = 0; r < rows; ++r) {
      out[r * count + p] = row[r];
      finite = finite && std::isfinite(row[r]);
    }
  }
  return finite ? TARN_OK : TARN_NOT_FINITE;
}

template <int M, int G, std::size_t W>
tarn_status apply(const double* coefficients, const double*, const double* x, double* y) {
  const Generator& generator = model<M>().generators[G];
  const std::uint64_t size = std::uint64_t{1} << generator.bits;
  std::fill(y, y + 2 * size * W, 0.0);
  for (const OperatorGroup& group : generator.sum.groups) {
    for (const WordTerm& term : group.terms) {
      for (std::uint64_t i = 0; i < size; ++i) {
        const Complex e = term.factor * element(term.word, i);
        const std::uint64_t to = i ^ term.word.x;
        for (std::size_t l = 0; l < W; ++l) {
          const Complex value = e * coefficients[group.coefficient * W + l] * Complex(x[2 * i * W + l], x[(2 * i + 1) * W + l]);
          y[2 * to * W + l] += value.real();
          y[(2 * to + 1) * W + l] += value.imag();
        }
      }
    }
  }
  return TARN_OK;
}

template <int M, int G, std::size_t W>
tarn_status stage(const double* coefficients, const double* prepared, size_t count, const double* weights,
                  const double* const* vectors, double* argument, double* y) {
  const std::size_t length = 2 * (std::size_t{1} << model<M>().generators[G].bits) * W;
  for (std::size_t i = 0; i < length; ++i) {
    argument[i] = 0;
    for (std::size_t j = 0; j < count; ++j) argument[i] += weights[j * W + i % W] * vectors[j][i];
  }
  return apply<M, G, W>(coefficients, prepared, argument, y);
}

tarn_status prepare(double*) { return TARN_OK; }

using Code = void (*)(void);
template <class F>
Code code(F* function) { return reinterpret_cast<Code>(function); }

template <int M, int G>
void add_generator(std::vector<tarn_entry>& entries, bool lanes) {
  entries.push_back({TARN_PREPARE, G, code(&prepare)});
  entries.push_back({TARN_APPLY, G, code(&apply<M, G, 1>)});
  entries.push_back({TARN_STAGE, G, code(&stage<M, G, 1>)});
  if (!lanes || G == 0) return;
  entries.push_back({TARN_LANE_APPLY, G, code(&apply<M, G, kLanes>)});
  entries.push_back({TARN_LANE_STAGE, G, code(&stage<M, G, kLanes>)});
}

/// The table and all it points to.
struct Tables {
  std::vector<tarn_function_set> sets;
  std::vector<tarn_generator> generators;
  std::vector<tarn_entry> entries;
  tarn_kernel kernel;
};

template <int M>
Kernel make_kernel(bool lanes) {
  auto tables = std::make_shared<Tables>();
  const char* names[kSets] = {"coefficients", "settings", "observables", "claims", "kinks", "spectrum 0"};
  for (std::size_t set = 0; set < kSets; ++set) {
    tables->sets.push_back({names[set], set == kCoefficients ? model<M>().coefficient_rows : kRows[set]});
  }
  for (const Generator& generator : model<M>().generators) tables->generators.push_back({"generator", generator.bits, 0});
  tables->entries = {{TARN_VALUES, 0, code(&values<M, 0, false>)}, {TARN_DERIVATIVES, 0, code(&values<M, 0, true>)},
                     {TARN_VALUES, 1, code(&values<M, 1, false>)}, {TARN_VALUES, 2, code(&values<M, 2, false>)},
                     {TARN_VALUES, 3, code(&values<M, 3, false>)}, {TARN_VALUES, 4, code(&values<M, 4, false>)},
                     {TARN_VALUES, 5, code(&values<M, 5, false>)}};
  add_generator<M, 0>(tables->entries, lanes);
  add_generator<M, 1>(tables->entries, lanes);
  if constexpr (M == 0) add_generator<M, 2>(tables->entries, lanes);
  tables->kernel = {TARN_ABI_VERSION, kLanes, kInputs, 0, kSets, static_cast<std::uint32_t>(tables->generators.size()),
                    static_cast<std::uint32_t>(tables->entries.size()), 0, tables->sets.data(), tables->generators.data(),
                    tables->entries.data()};
  auto kernel = Kernel::adopt(&tables->kernel, [tables] {});
  return std::move(kernel).value();
}

Plan common_plan() {
  Plan plan;
  plan.experiment = "trial";
  plan.parameters = {{"a", 0, {"GHz", 6.283185307179586}, 2.0, {}, {}, {}},
                     {"b", 1, {}, 3.0, {}, {}, {}},
                     {"c", 2, {}, 0.0, {}, {}, {}},
                     {"ta", kTa, {"ns", 1}, 10.0, {}, {}, {}}};
  plan.chip.offsets_slot = kOffsets;
  plan.reading_slot = kReadings;
  plan.observable_slot = hand::kObservables;
  plan.pace = {PaceRamp{setting(2), setting(0)}};
  plan.begin = BeginGround{};
  plan.choice.equation = Equation::schroedinger;
  plan.points = {0};
  return plan;
}

}  // namespace

Kernel one_qubit(bool lanes) { return make_kernel<0>(lanes); }
Kernel two_qubits(bool lanes) { return make_kernel<1>(lanes); }

Kernel ring_of_nine() { return make_kernel<2>(false); }

Plan ring_plan() {
  Plan plan = common_plan();
  for (int q = 0; q < 9; ++q) plan.chip.qubits.push_back({"q[" + std::to_string(q) + "]", {}});
  plan.chip.hamiltonian = ring_hamiltonian();
  return plan;
}

Setting setting(std::uint32_t row) { return {row, {"model.tarn", row + 1, 1, 2}}; }

Plan one_qubit_plan() {
  Plan plan = common_plan();
  plan.chip.qubits = {{"q", {}}};
  plan.chip.hamiltonian = one_qubit_hamiltonian();
  return plan;
}

Plan two_qubit_plan(bool with_drive) {
  Plan plan = common_plan();
  plan.chip.qubits = {{"q[0]", {}}, {"q[1]", {}}};
  plan.chip.hamiltonian = two_qubit_hamiltonian();
  if (with_drive) plan.chip.drive = two_qubit_drive();
  return plan;
}

void observe(Plan& plan, const std::string& name, Reading reading, Moment moment) {
  const auto row = static_cast<std::uint32_t>(plan.readings.size());
  plan.readings.push_back(std::move(reading));
  Observable observable;
  observable.name = name;
  observable.moment = moment;
  observable.row = row;
  observable.readings = {row};
  plan.observables.push_back(observable);
}

}  // namespace hand
