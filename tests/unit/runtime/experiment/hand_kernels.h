#pragma once
/// \file Kernels written by hand behind the C ABI, and plans for them.

#include <string>
#include <vector>

#include "runtime/experiment/run.h"

namespace hand {

/// Inputs: 0..3 parameters a, b, c, ta; 4 offsets on; 5..8 readings; 9..12 observables.
inline constexpr std::uint32_t kTa = 3, kOffsets = 4, kReadings = 5, kObservables = 9, kInputs = 13;

/// Settings: rows 0 ta, 1 zero, 2 one, 3 half, 4 a, 5 b, 6 c.
/// Observables: rows 0..3 the readings, 4 reading 0 minus reading 1, 5 ln(reading 0).
/// Claims: rows 0..3 the observables, 4 ta, 5 one half, 6 a.
/// Kinks: row 0 s.
/// Coefficients: see each kernel.

/// One qubit. Coefficients: 0 -a/2 (on X), 1 -b/2 (2s - 1) (on Z), 2 c (rate of |0><1|), 3 one.
/// With `lanes` the kernel has lane entries.
tarn::runtime::Kernel one_qubit(bool lanes);

/// Two qubits. Coefficients: 0 -(1-s) a (on X0 + 0.8 X1), 1 b s (on 0.3 Z0 - 0.5 Z1 + Z0 Z1),
/// 2 0.1 c sin(t) (on Y0 X1: a term in t), 3 one.
tarn::runtime::Kernel two_qubits(bool lanes);

/// A ring of nine qubits. Coefficients: 0 -(1-s) a (on sum X), 1 -s b (on sum Z Z), 2 and 3 one.
tarn::runtime::Kernel ring_of_nine();
tarn::runtime::Plan ring_plan();

/// A plan on either kernel: chip, parameters, a ramp from 0 to 1 over ta; nothing observed yet.
tarn::runtime::Plan one_qubit_plan();
tarn::runtime::Plan two_qubit_plan(bool with_drive);

/// Adds an observable that is its first reading, and the reading. At most four each.
void observe(tarn::runtime::Plan& plan, const std::string& name, tarn::runtime::Reading reading,
             tarn::runtime::Moment moment);

tarn::runtime::Setting setting(std::uint32_t row);

}  // namespace hand
