#pragma once
/// \file A density without closed forms (a table, a function) made ready for its transforms.

#include "runtime/bath/panel_series.h"
#include "runtime/bath/spectral_density.h"

namespace tarn::runtime {

/// Legendre panels of J(w) and of J(w) coth(w/2 theta) on the support w > 0.
struct DensityPanels {
  PanelSeries plain;
  PanelSeries thermal;  ///< The same as `plain` when theta = 0.
};

/// Relative tolerance of a panel 1e-13. `component` must be free of faults. theta >= 0.
DensityPanels expand_density(const Component& component, double theta);

/// S(w) of those panels, any real w, rad/ns: the even part comes from J, the odd from J coth.
/// Accuracy near 1e-12 lambda where J is smooth on its panels.
double panel_shift(const DensityPanels& panels, double w);

/// C(t), any real t, rad^2/ns^2. Accuracy near 1e-12 C(0), uniform in t.
std::complex<double> panel_correlation(const DensityPanels& panels, double t);

}  // namespace tarn::runtime
