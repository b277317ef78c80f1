// engine/rates/kitagawa.hpp -- two crude rates differ: how much is the rate, how much the mix?
//
// With share s of exposure and rate r in each stratum, the difference of crude rates (group 1 less group
// 0) is the sum of a rate part, (r1 - r0)(s1 + s0)/2, and a mix part, (s1 - s0) times the stratum's mean
// rate less the mean of the two crude rates. The last term adds up to 0 over the strata, so the sum is
// exact; it makes a growing low-rate stratum count as relief.
// Source: Kitagawa 1955, J. Amer. Statist. Assoc. 50, 1168-1194.
// Checked by: tests/engine/rates/kitagawa_test.cpp, tests/reference/rates/kitagawa.tsv.
#pragma once

#include <cstddef>
#include <span>
#include <vector>

#include "engine/rates/two_rates.hpp"

namespace countsel {

/// How limits for a part, a weighted sum of Poisson counts with exposures fixed, are found.
///   normal  value -+ z standard error; NaN with no events in it
///   gamma   Fay and Feuer's gamma limits of the terms counted up and of those counted down, joined by Zou
///   and
///           Donner, Statist. Med. 27 (2008) 1693-1702; holds at small counts
enum class PartMethod { normal, gamma };

struct Part {
  double value, low, high;
};

struct StratumParts {
  double rate_part, mix_part;
};

/// absent: strata (by place, from 0) with exposure on one side only; their share on the other is 0, their
/// rate there is taken as the same, so that all of their part is mix.
struct RateOrMix {
  Part difference, rate, mix;
  std::vector<StratumParts> strata;
  std::vector<std::size_t> absent;
};

/// Splits the difference of the crude rates. Per unit of exposure.
///   strata  exposures may be 0 where the count is 0; group 0 is the reference
/// difference = rate part + mix part to rounding. Refuses bad_count, bad_exposure (also: a group without
/// any exposure), too_few (no strata), bad_value (confidence). A stratum with no exposure at all is idle.
RateOrMix rate_or_mix(std::span<const TwoRates> strata, PartMethod method, double confidence,
                      Side side = Side::both);

}  // namespace countsel
