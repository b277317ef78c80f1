// engine/rates/shrinkage.hpp -- what is each unit's rate, once the luck of few events is allowed for?
//
// The units' true rates are taken to follow a gamma distribution, itself estimated from all the counts by
// their marginal likelihood. A unit with much exposure keeps its own rate, one with little is drawn
// towards the rest; where the counts show no spread beyond chance, all share one rate.
// Source: Efron and Morris 1973, J. Am. Statist. Ass. 68; Lawless 1987, Can. J. Statist. 15;
// Carlin and Louis 2000, Bayes and Empirical Bayes Methods for Data Analysis, 3.3.
// Checked by: tests/engine/rates/shrinkage_test.cpp, tests/reference/rates/shrinkage.tsv.
#pragma once

#include <span>
#include <vector>

#include "engine/work.hpp"

namespace countsel {

/// Gamma of the units' rates: mean shape / rate, `rate` in units of exposure.
struct UnitRatePrior {
  double shape, rate;  ///< both +infinity where no spread is found (or there are no events)
  double mean;         ///< the mean rate, shape / rate
  double loglik;       ///< marginal log likelihood of the counts, with its constants
  bool no_spread;      ///< the likelihood is greatest with all rates alike
};

/// Greatest marginal likelihood over shape and rate. Needs no start and cannot fail to converge.
///   counts, exposures  n units, counts whole, exposures above 0
/// Refuses bad_count, bad_exposure, length_mismatch, too_few (no units).
UnitRatePrior fit_unit_rates(std::span<const double> counts, std::span<const double> exposures,
                             const Work& work = {});

/// One entry per unit, in events per unit of exposure.
struct ShrunkRates {
  std::vector<double> rate, low, high;
};

/// Posterior means (shape + count) / (rate + exposure) with equal-tailed limits at `confidence`. The prior is
/// taken as known, so the limits do not carry its own doubt. With no spread found every unit has the
/// common rate, with the limits of that rate from all counts together (Jeffreys' prior).
/// Refuses as fit_unit_rates, and bad_value (confidence outside (0, 1)).
ShrunkRates shrink_rates(std::span<const double> counts, std::span<const double> exposures,
                         const UnitRatePrior& prior, double confidence);

}  // namespace countsel
