// engine/rates/count_fits_parts.hpp -- what the fits of count distributions share, for their files alone.
// Checked by: tests/engine/rates/count_fits_test.cpp.
#pragma once

#include <functional>
#include <vector>

#include "engine/rates/count_fits.hpp"

namespace countsel {

/// Fills parameters, aic and bic from the loglik.
CountFit finished_fit(CountFit fit, const CountTotals& totals);

// On condensed rows with some events.
CountFit fit_poisson_counts(const CountRows& rows, const CountTotals& totals, const Work& work);
CountFit fit_negative_binomial_counts(const CountRows& rows, const CountTotals& totals, const Work& work);
/// Zero-inflated; `plain` is the fit without added zeros, `inflated` (where the spread is free) that of the
/// zero-inflated Poisson.
CountFit fit_zero_inflated(const CountRows& rows, const CountTotals& totals, const CountFit& plain,
                           const CountFit* inflated, const Work& work);

/// A function of a few unknowns to be made as large as possible.
struct ValueGradient {
  double value;
  std::vector<double> gradient;
};
struct Maximum {
  std::vector<double> at;
  double value;
  bool converged;
};
/// Climbs from `start` by the BFGS updates with halved steps (Nocedal and Wright 2006, ch. 6). Converged:
/// every slope below `slope_tolerance`, or no step that still gains. Stops, not converged, once an unknown
/// other than the first falls below `edge`.
Maximum climb(const std::function<ValueGradient(const std::vector<double>&)>& f, std::vector<double> start,
              double slope_tolerance, double edge);

}  // namespace countsel
