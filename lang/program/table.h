#pragma once
/// \file How a table is read between its points: one piecewise cubic for every interpolation.
///
/// The interpreter here and compiled code use the same coefficients, so both give the same value.

#include "lang/program/graph.h"

namespace tarn {

/// Coefficients by `data.by`:
/// - linear, loglog: straight pieces (of the logarithms for loglog);
/// - monotone: shape-preserving cubic, SIAM J. Numer. Anal. 17, 238 (1980), with the slopes of
///   three-point differences limited to the monotone region;
/// - spline: twice differentiable, not-a-knot at both ends; with three points the parabola, with
///   two the line through them.
/// Precondition: at least two points, x strictly ascending, positive x and y for loglog.
PiecewiseCubic piecewise_cubic(const TableData& data);

/// Value at x; outside the knots the end value, or zero if the table does not hold it.
double read_table(const TableData& data, const PiecewiseCubic& cubic, double x);

}  // namespace tarn
