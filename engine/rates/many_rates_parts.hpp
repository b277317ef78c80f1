// engine/rates/many_rates_parts.hpp -- what the tests of several rates share.
#pragma once

#include <span>
#include <vector>

#include "engine/rates/many_rates.hpp"

namespace countsel {

/// One group's part of the distance from equal rates; expected above 0.
double distance_part(Distance distance, double count, double expected);

/// Counts expected if all rates were equal. Refuses as many_rates_test says.
std::vector<double> equal_rates_counts(std::span<const double> counts, std::span<const double> exposures);

/// The chance, given their sum, that counts with these expectations lie at least `distance` from them:
/// every way to share `events` out is visited.
double enumerated_chance(std::span<const double> expected, double events, Distance measure, double distance,
                         const Work& work);

}  // namespace countsel
