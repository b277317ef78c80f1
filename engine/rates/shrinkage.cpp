// engine/rates/shrinkage.cpp -- the gamma of the units' rates and each unit's posterior.
#include "engine/rates/shrinkage.hpp"

#include <limits>

#include "engine/numbers/distributions.hpp"
#include "engine/rates/count_fits.hpp"
#include "engine/refusal.hpp"

namespace countsel {

UnitRatePrior fit_unit_rates(std::span<const double> counts, std::span<const double> exposures,
                             const Work& work) {
  constexpr double infinity = std::numeric_limits<double>::infinity();
  const CountFit fit =
      fit_count_distribution({counts, exposures, {}}, CountDistribution::negative_binomial, work);
  if (fit.spread == 0) return {infinity, infinity, fit.rate, fit.loglik, true};
  return {1 / fit.spread, 1 / (fit.spread * fit.rate), fit.rate, fit.loglik, false};
}

ShrunkRates shrink_rates(std::span<const double> counts, std::span<const double> exposures,
                         const UnitRatePrior& prior, double confidence) {
  require_count_rows({counts, exposures, {}});
  if (!(confidence > 0 && confidence < 1))
    throw Refusal(Code::bad_value, "The confidence must lie between 0 and 1.");
  const double tail = (1 - confidence) / 2;
  ShrunkRates shrunk;
  const std::size_t n = counts.size();
  if (prior.no_spread) {
    const CountTotals totals = count_totals({counts, exposures, {}});
    const double shape = totals.events + 0.5;
    shrunk.rate.assign(n, prior.mean);
    shrunk.low.assign(n, totals.events == 0 ? 0 : gamma_quantile(shape, tail) / totals.exposure);
    shrunk.high.assign(n, gamma_upper_quantile(shape, tail) / totals.exposure);
    return shrunk;
  }
  for (std::size_t i = 0; i < n; ++i) {
    const double shape = prior.shape + counts[i], exposure = prior.rate + exposures[i];
    shrunk.rate.push_back(shape / exposure);
    shrunk.low.push_back(gamma_quantile(shape, tail) / exposure);
    shrunk.high.push_back(gamma_upper_quantile(shape, tail) / exposure);
  }
  return shrunk;
}

}  // namespace countsel
