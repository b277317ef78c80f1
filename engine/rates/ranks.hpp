// engine/rates/ranks.hpp -- which unit is worst? How little a rank can be trusted.
//
// Each draw gives every unit a rate from its own posterior and ranks them; what a unit's rank does over
// the draws is its uncertainty. Units with few events wander over most of the table, and their ranks say so.
// Source: Goldstein and Spiegelhalter 1996, J. R. Statist. Soc. A 159, 385-443; Laird and Louis 1989, J.
// Educ. Stat. 14. Checked by: tests/engine/rates/ranks_test.cpp.
#pragma once

#include <cstddef>
#include <cstdint>
#include <span>
#include <vector>

#include "engine/numbers/random.hpp"
#include "engine/rates/shrinkage.hpp"
#include "engine/work.hpp"

namespace countsel {

struct RanksSpec {
  double confidence = 0.95;
  std::size_t draws = 0;  ///< 0: default_draws(units)
  std::uint64_t seed = default_seed;
};

/// 2,000 for up to 600 units, fewer for more, never below 250: a rank limit is then within a few
/// hundredths of the table of where endless draws would put it.
std::size_t default_draws(std::size_t units);

/// Units beyond which ranks are not drawn.
inline constexpr std::size_t most_ranked_units = 50000;

/// Rank 1 is the highest rate. One entry per unit.
struct UnitRanks {
  std::vector<double> rank;       ///< place of the shrunk rate; equal rates share the middle of their places
  std::vector<double> mean_rank;  ///< over the draws; the posterior expected rank
  std::vector<double> low,
      high;               ///< equal-tailed at `confidence`, reaching out to `rank` where it lies outside
  std::size_t draws = 0;  ///< used; 0 where none were needed or wanted
};

/// With no spread found all units share one rate: every rank is the middle one, its limits the whole table.
/// More than most_ranked_units: rank as usual, mean_rank, low and high NaN.
/// The draws do not depend on the number of hands: draw k has stream k of the seed.
/// Refuses as fit_unit_rates; bad_value (confidence); too_large (units x draws above 4e7).
/// Cost: about 0.1 us for each unit and draw on one core.
UnitRanks rank_units(std::span<const double> counts, std::span<const double> exposures,
                     const UnitRatePrior& prior, const RanksSpec& spec, const Work& work = {});

}  // namespace countsel
