#include "runtime/equation/davies_explicit.h"

#include <algorithm>
#include <array>
#include <cmath>

#include "runtime/integrate/dense_exponential.h"

namespace tarn::runtime {
namespace {

using Complex = std::complex<double>;

constexpr double kStaticPhase = 1000;
constexpr Eigen::Index kStaticDimension = 16;

/// d rho/dt in the computational basis; the generator of the last s is kept.
template <class Scalar>
class Generator {
 public:
  explicit Generator(const ExplicitSegment<Scalar>& task) : task_(task) {
    for (const LabJump& jump : task.jumps) {
      ops_.push_back(std::sqrt(jump.rate) * jump.op);
      const Density loss = 0.5 * ops_.back().adjoint() * ops_.back();
      loss_ = loss_.size() == 0 ? loss : Density(loss_ + loss);
    }
  }

  void operator()(double t, const Density& rho, Density& out) {
    const Segment& segment = task_.segment;
    move_to(segment.s0 == segment.s1 ? segment.s0 : segment.s0 + (segment.s1 - segment.s0) * (t - segment.t0) / (segment.t1 - segment.t0));
    const Density level = vectors_.adjoint() * rho * vectors_;
    Density change(level.rows(), level.cols());
    for (Eigen::Index b = 0; b < level.cols(); ++b)
      for (Eigen::Index a = 0; a < level.rows(); ++a) change(a, b) = Complex(0, frame_.energies[b] - frame_.energies[a]) * level(a, b);
    add_dissipator(table_, level, change);
    out.noalias() = vectors_ * change * vectors_.adjoint();
    for (const Density& op : ops_) out += op * rho * op.adjoint();
    if (loss_.size() != 0) out -= loss_ * rho + rho * loss_;
    if (task_.drive) {
      const Density drive = task_.drive(t);
      out -= Complex(0, 1) * (drive * rho - rho * drive);
    }
    ++evaluations;
  }

  double width() const { return frame_.energies.maxCoeff() - frame_.energies.minCoeff(); }
  void move_to(double s) {
    if (made_ && s == frame_.s) return;
    const Track<Scalar>& track = task_.tables.track();
    frame_ = track.at(s);
    table_ = davies_table<Scalar>(track.model(), frame_, frequency_groups(frame_.energies, track.tolerance()), task_.tables.baths());
    vectors_ = frame_.vectors.template cast<Complex>();
    made_ = true;
    ++decompositions;
  }

  std::uint64_t evaluations = 0, decompositions = 0;

 private:
  const ExplicitSegment<Scalar>& task_;
  std::vector<Density> ops_;
  Density loss_;
  bool made_ = false;
  Frame<Scalar> frame_;
  DaviesTable table_;
  Density vectors_;
};

// Dormand-Prince 5(4): J. Comput. Appl. Math. 6, 19 (1980).
constexpr std::array<std::array<double, 6>, 7> kStages{{{},
                                                        {1.0 / 5},
                                                        {3.0 / 40, 9.0 / 40},
                                                        {44.0 / 45, -56.0 / 15, 32.0 / 9},
                                                        {19372.0 / 6561, -25360.0 / 2187, 64448.0 / 6561, -212.0 / 729},
                                                        {9017.0 / 3168, -355.0 / 33, 46732.0 / 5247, 49.0 / 176, -5103.0 / 18656},
                                                        {35.0 / 384, 0, 500.0 / 1113, 125.0 / 192, -2187.0 / 6784, 11.0 / 84}}};
constexpr std::array<double, 7> kNodes{0, 1.0 / 5, 3.0 / 10, 4.0 / 5, 8.0 / 9, 1, 1};
constexpr std::array<double, 7> kError{71.0 / 57600, 0, -71.0 / 16695, 71.0 / 1920, -17253.0 / 339200, 22.0 / 525, -1.0 / 40};

template <class Scalar>
class Stepper {
 public:
  Stepper(Generator<Scalar>& generator, double tolerance, const Interrupted& interrupted)
      : generator_(generator), tolerance_(tolerance), interrupted_(interrupted) {}

  /// From t to `end`. Errors: `step_underflow`, `interrupted`.
  std::optional<RunError> advance(double& t, double end, Density& state, Counters& counters) {
    if (step_ == 0) step_ = 0.1 / std::max(generator_.width(), 1e-300);
    while (t < end) {
      const bool last = t + step_ >= end;
      const double h = last ? end - t : step_;
      if (t + h == t && !last) return RunError{"step_underflow", "the explicit integrator's step became too small"};
      const std::optional<double> off = attempt(t, h, state);
      if (!off) return RunError{"interrupted", "stopped before the end"};
      const double error = *off / tolerance_;
      const double factor = std::clamp(0.9 * std::pow(std::max(error, 1e-10), -0.2), 0.2, 4.0);
      if (error > 1) {
        step_ = h * factor;
        ++counters.rejected;
        continue;
      }
      t = last ? end : t + h;
      state = trial_;
      ++counters.steps;
      if (!last || factor < 1) step_ = h * factor;
    }
    return std::nullopt;
  }

 private:
  /// The error of a step, whose end is then in trial_; none if interrupted.
  std::optional<double> attempt(double t, double h, const Density& state) {
    for (std::size_t stage = 0; stage < 7; ++stage) {
      if (interrupted_ && interrupted_()) return std::nullopt;
      trial_ = state;
      for (std::size_t k = 0; k < stage; ++k)
        if (kStages[stage][k] != 0) trial_ += h * kStages[stage][k] * slope_[k];
      generator_(t + kNodes[stage] * h, trial_, slope_[stage]);
    }
    Density error = h * kError[0] * slope_[0];
    for (std::size_t k = 2; k < 7; ++k) error += h * kError[k] * slope_[k];
    return error.cwiseAbs().maxCoeff();
  }

  Generator<Scalar>& generator_;
  double tolerance_, step_ = 0;
  const Interrupted& interrupted_;
  Density trial_;
  std::array<Density, 7> slope_;
};

/// The map of a static generator as N^2 x N^2.
template <class Scalar>
Eigen::MatrixXcd whole_map(Generator<Scalar>& generator, double t, Eigen::Index dimension) {
  Eigen::MatrixXcd map(dimension * dimension, dimension * dimension);
  Density unit = Density::Zero(dimension, dimension), image(dimension, dimension);
  for (Eigen::Index p = 0; p < unit.size(); ++p) {
    unit.data()[p] = 1;
    generator(t, unit, image);
    map.col(p) = image.reshaped();
    unit.data()[p] = 0;
  }
  return map;
}

template <class Scalar>
void exponentials(Generator<Scalar>& generator, double t, std::span<const double> times, Density& state, const StateAt& visit, Counters& counters) {
  const Eigen::MatrixXcd map = whole_map<Scalar>(generator, t, state.rows());
  for (const double time : times) {
    const Eigen::VectorXcd image = dense_exponential(map, time - t) * state.reshaped();
    state = image.reshaped(state.rows(), state.cols());
    t = time;
    ++counters.exponentials;
    visit(t, state);
  }
}

}  // namespace

double explicit_tolerance(int depth) { return 1e-7 * std::pow(30.0, -depth); }

template <class Scalar>
std::optional<RunError> integrate_explicitly(const ExplicitSegment<Scalar>& task, std::span<const double> times, double tolerance,
                                             const DaviesOptions& options, Density& state, const StateAt& visit, Counters& counters) {
  Generator<Scalar> generator(task);
  const Segment& segment = task.segment;
  generator.move_to(segment.s0);
  double t = segment.t0;
  const double phase = (segment.t1 - segment.t0) * task.tables.track().width();
  const bool is_static = segment.s0 == segment.s1 && !task.drive;
  if (is_static && phase > kStaticPhase && state.rows() <= kStaticDimension) {
    exponentials<Scalar>(generator, t, times, state, visit, counters);
    return std::nullopt;
  }
  if (phase > options.max_explicit_phase) return RunError{"too_much_phase", "an explicit integration of this pace would take too long"};
  Stepper<Scalar> stepper(generator, tolerance, options.interrupted);
  for (const double time : times) {
    if (const auto error = stepper.advance(t, time, state, counters)) return error;
    visit(t, state);
  }
  counters.evaluations += generator.evaluations;
  counters.decompositions += generator.decompositions;
  return std::nullopt;
}

template std::optional<RunError> integrate_explicitly<double>(const ExplicitSegment<double>&, std::span<const double>, double, const DaviesOptions&, Density&, const StateAt&, Counters&);
template std::optional<RunError> integrate_explicitly<Complex>(const ExplicitSegment<Complex>&, std::span<const double>, double, const DaviesOptions&, Density&, const StateAt&, Counters&);

}  // namespace tarn::runtime
