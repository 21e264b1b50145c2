// Reference: CVODE of SUNDIALS 6.4.1 (Debian libsundials-dev), Adams methods at 1e-12.
#include <catch2/catch.hpp>
#include <cmath>
#include <cvode/cvode.h>
#include <nvector/nvector_serial.h>
#include <sunnonlinsol/sunnonlinsol_fixedpoint.h>

#include "tests/physics/closed/model.h"

using namespace tarn;
using namespace tarn::test;

namespace {

struct Problem {
  const Model* model;
  double duration;
};

int right_side(double t, N_Vector y, N_Vector dy, void* data) {
  const auto& problem = *static_cast<const Problem*>(data);
  const auto n = Eigen::Index{1} << problem.model->bits;
  const auto view = [n](N_Vector v) {
    return Eigen::Map<Eigen::VectorXcd>(reinterpret_cast<Complex*>(N_VGetArrayPointer(v)), n);
  };
  view(dy) = problem.model->generator(0, t / problem.duration, t) * view(y);
  return 0;
}

/// The state at the end of a ramp of s from 0 to 1.
Eigen::VectorXcd reference(const Model& model, double duration, const Eigen::VectorXcd& initial) {
  SUNContext context = nullptr;
  REQUIRE(SUNContext_Create(nullptr, &context) == 0);
  N_Vector y = N_VNew_Serial(2 * initial.size(), context);
  std::copy_n(reinterpret_cast<const double*>(initial.data()), 2 * initial.size(), N_VGetArrayPointer(y));
  Problem problem{&model, duration};
  void* solver = CVodeCreate(CV_ADAMS, context);
  SUNNonlinearSolver fixed_point = SUNNonlinSol_FixedPoint(y, 0, context);
  REQUIRE(CVodeInit(solver, right_side, 0, y) == CV_SUCCESS);
  REQUIRE(CVodeSStolerances(solver, 1e-12, 1e-13) == CV_SUCCESS);
  REQUIRE(CVodeSetNonlinearSolver(solver, fixed_point) == CV_SUCCESS);
  CVodeSetUserData(solver, &problem);
  CVodeSetMaxNumSteps(solver, 1000000);
  CVodeSetStopTime(solver, duration);
  double reached = 0;
  REQUIRE(CVode(solver, duration, y, &reached, CV_NORMAL) >= 0);
  const Eigen::VectorXcd result =
      Eigen::Map<Eigen::VectorXcd>(reinterpret_cast<Complex*>(N_VGetArrayPointer(y)), initial.size());
  CVodeFree(&solver);
  SUNNonlinSolFree(fixed_point);
  N_VDestroy(y);
  SUNContext_Free(&context);
  return result;
}

}  // namespace

TEST_CASE("a driven closed anneal agrees with CVODE") {
  Model model;
  model.bits = 3;
  model.reads_t = true;
  Sparse field(8, 8), problem(8, 8);
  for (std::size_t q = 0; q < 3; ++q) {
    field += on('x', q, 3);
    problem += (0.5 + 0.3 * static_cast<double>(q)) * on('z', q, 3);
  }
  problem += Sparse(on('z', 0, 3) * on('z', 1, 3)) - 0.7 * Sparse(on('z', 1, 3) * on('z', 2, 3));
  model.parts = {closed(field), closed(problem), closed(on('y', 1, 3))};
  model.coefficients = [](std::size_t, double s, double t, double* rows) {
    rows[0] = -2 * (1 - s);
    rows[1] = 4 * s;
    rows[2] = 0.8 * std::sin(9 * t);
  };
  const Eigen::VectorXcd start = Eigen::VectorXcd::Constant(8, std::sqrt(0.125));
  const Trace trace = run_closed(model, ramp(15), start, 1e-9, {15});
  CHECK((trace.states[0] - reference(model, 15, start)).norm() < 5e-9);
}

TEST_CASE("an open anneal of two qubits agrees with CVODE") {
  Model model;
  model.bits = 4;
  Sparse field = on('x', 0, 2) + on('x', 1, 2);
  Sparse problem = on('z', 0, 2) - 0.4 * on('z', 1, 2) + Sparse(on('z', 0, 2) * on('z', 1, 2));
  model.parts = {commutator(field), commutator(problem), dissipator(on('m', 0, 2)), dissipator(on('z', 1, 2))};
  model.coefficients = [](std::size_t, double s, double, double* rows) {
    rows[0] = -2 * (1 - s);
    rows[1] = 3 * s;
    rows[2] = 0.05 * s;
    rows[3] = 0.02;
  };
  const Dense rho = Dense::Constant(4, 4, 0.25);
  const Trace trace = run_lindblad(model, ramp(20), rho, 1e-9, {20});
  CHECK((trace.states[0] - reference(model, 20, Eigen::VectorXcd::Constant(16, 0.25))).norm() < 5e-9);
}
