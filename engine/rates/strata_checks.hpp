// engine/rates/strata_checks.hpp -- what every stratified comparison asks of its strata first.
#pragma once

#include <span>

#include "engine/rates/two_rates.hpp"

namespace countsel {

/// Refuses as engine/rates/strata.hpp says.
void require_strata(std::span<const TwoRates> strata, double confidence);

/// True where both sides have exposure.
inline bool two_sided(const TwoRates& stratum) { return stratum.exposure1 > 0 && stratum.exposure0 > 0; }

/// The part of 1 - confidence that lies beyond one limit, as a normal deviate.
double limit_deviate(double confidence, Side side);

/// The p-value of a normal deviate against either, a positive or a negative difference.
double deviate_p(double z, Direction direction);

}  // namespace countsel
