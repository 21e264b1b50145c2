#pragma once
/// \file `2*pi` beside a frequency. A frequency is an angle per time, so its cycles are counted as
/// 2 pi rad already.

#include "lang/check/session.h"

namespace tarn {

/// Looks at a product of this value. Warns where `2*pi` multiplies or divides one frequency, and
/// what comes out is again a frequency, an energy or an angle; in spectra and functions, where 2 pi
/// may belong to the formula, an angle only. `2*pi rad` makes an angle too many: then false, and
/// that is reported as an error.
bool check_turns(Session& session, const Scope& scope, ast::ExprId product, const Value& value);

}  // namespace tarn
