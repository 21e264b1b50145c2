#include <catch2/catch.hpp>
#include <cmath>

#include "runtime/levels/rotation.h"
#include "runtime/levels/track.h"
#include "runtime/linear/eigensystem.h"

using namespace tarn::runtime;

namespace {

/// A 2 x 2 or larger Hamiltonian given as a function, for tracking alone.
LevelModel<double> model_of(Eigen::Index size, std::function<Eigen::MatrixXd(double)> hamiltonian) {
  LevelModel<double> model;
  model.dimension = size;
  model.solve = [=](double s, Eigen::Index count) {
    const auto eigen = eigensystem(hamiltonian(s));
    Frame<double> frame;
    frame.s = s;
    frame.energies = eigen.values.head(count);
    frame.vectors = eigen.vectors.leftCols(count);
    frame.next = count < size ? eigen.values[count] : INFINITY;
    return frame;
  };
  model.slope = [=](double s, const Matrix<double>& columns) -> Matrix<double> {
    return (hamiltonian(s + 1e-4) - hamiltonian(s - 1e-4)) / 2e-4 * columns;
  };
  return model;
}

double largest_rotation(const Track<double>& track) {
  double most = 0;
  for (std::size_t i = 0; i < track.intervals(); ++i) most = std::max(most, track.stretch(i, 0).steps->front().first.rotation.cwiseAbs().maxCoeff());
  return most;
}

}  // namespace

TEST_CASE("logarithm and exponential of a rotation are inverse") {
  const double size = GENERATE(1e-7, 0.01, 0.1, 0.5);
  std::srand(4);
  const Eigen::MatrixXd random = Eigen::MatrixXd::Random(9, 9);
  const Matrix<double> w = size / 3 * (random - random.transpose());
  const Matrix<double> r = rotation_exponential<double>(w);
  CHECK((r * r.transpose() - Eigen::MatrixXd::Identity(9, 9)).cwiseAbs().maxCoeff() < 1e-13);
  CHECK((rotation_logarithm<double>(r) - w).cwiseAbs().maxCoeff() < 1e-13);
}

TEST_CASE("levels that nothing couples cross, and their labels with them") {
  const auto model = model_of(2, [](double s) -> Eigen::MatrixXd { return Eigen::Vector2d(s - 0.37, 0.37 - s).asDiagonal(); });
  const Track<double> track(model, {});
  CHECK(largest_rotation(track) < 1e-12);
  CHECK(track.intervals() < 20);
  const auto& last = track.nodes().back();
  CHECK(last.energies[0] == Approx(0.63));  // Label 0 began below and ends above.
}

TEST_CASE("an avoided crossing is resolved however narrow") {
  const double gap = GENERATE(1e-2, 1e-4, 1e-6);
  const auto model = model_of(2, [=](double s) -> Eigen::MatrixXd {
    Eigen::Matrix2d h;
    h << s - 0.37, gap / 2, gap / 2, 0.37 - s;
    return h;
  });
  const Track<double> track(model, {});
  CHECK(track.resolved());
  CHECK(largest_rotation(track) < 0.15);
  double turned = 0;  // From one diabatic state to the other: the mixing angle (atan2(gap, -2 x0) - atan2(gap, 2 x1))/2.
  for (std::size_t i = 0; i < track.intervals(); ++i) {
    const auto stretch = track.stretch(i, 0);
    for (const auto& step : *stretch.steps) turned += step.first.rotation(0, 1) + step.second.rotation(0, 1);
  }
  CHECK(std::abs(turned) == Approx((std::atan2(gap, -2 * 0.37) - std::atan2(gap, 2 * 0.63)) / 2).epsilon(1e-9));
}

TEST_CASE("the cut does not part a manifold") {
  const auto model = model_of(4, [](double s) -> Eigen::MatrixXd { return Eigen::Vector4d(-1 - s, 0, 0, 1 + s).asDiagonal(); });
  TrackOptions options;
  options.levels = 2;
  CHECK(Track<double>(model, options).levels() == 3);
}

TEST_CASE("frequencies coincide where chains of them are close") {
  const Eigen::Vector4d product(0, 1, 1, 2), generic(0, 1, 1.3, 2.7);
  CHECK(frequency_groups(product, 1e-8).count() == 5);  // -2, -1, 0, 1, 2
  CHECK_FALSE(is_simple(frequency_groups(product, 1e-8), 4));
  CHECK(is_simple(frequency_groups(generic, 1e-8), 4));
  CHECK(shared_groups(frequency_groups(product, 1e-8), generic, 1e-8).count() == 13);
}

// What does not fit is made again, and the same again.
TEST_CASE("refinements without memory are those with it") {
  const auto model = model_of(2, [](double s) -> Eigen::MatrixXd {
    Eigen::Matrix2d h;
    h << s - 0.4, 0.05, 0.05, 0.4 - s;
    return h;
  });
  TrackOptions poor;
  poor.memory = std::make_shared<MemoryBudget>(2000);
  const Track<double> rich(model, {}), track(model, poor);
  for (int depth = 0; depth <= 4; ++depth) {
    const auto kept = rich.stretch(3, depth), made = track.stretch(3, depth);
    REQUIRE(made.frames.size() == kept.frames.size());
    for (std::size_t k = 0; k < kept.steps->size(); ++k) {
      CHECK((*made.steps)[k].middle.vectors == (*kept.steps)[k].middle.vectors);
      CHECK((*made.steps)[k].second.rotation == (*kept.steps)[k].second.rotation);
      CHECK(made.frames[k]->vectors == kept.frames[k]->vectors);
    }
  }
  CHECK(track.stretch(3, 4).steps != track.stretch(3, 4).steps);
  CHECK(rich.stretch(3, 4).steps == rich.stretch(3, 4).steps);
}
