// engine/rates/many_rates.hpp -- several groups: do their rates differ beyond chance?
//
// Given the sum of all counts, equal rates share it out multinomially in proportion to exposure. The
// likelihood ratio and Pearson's statistic measure the distance from that; their chance comes from
// chi-square, or from the multinomial itself: all outcomes where they are few enough, else draws.
// Source: named at each function.
// Checked by: tests/engine/rates/many_rates_test.cpp, tests/reference/rates/many_rates.tsv.
#pragma once

#include <cstddef>
#include <cstdint>
#include <span>
#include <vector>

#include "engine/numbers/random.hpp"
#include "engine/rates/adjust.hpp"
#include "engine/rates/two_rates.hpp"
#include "engine/work.hpp"

namespace countsel {

/// The measure of distance from equal rates, expected counts being the sum's share of exposure.
///   likelihood  2 sum of count log(count / expected) (Wilks 1938)
///   pearson     sum of (count - expected)^2 / expected (Pearson 1900)
enum class Distance { likelihood, pearson };

/// How the chance of such a distance was found.
enum class ChanceBy { chi_square, enumeration, simulation };

/// statistic, its degrees of freedom (groups less 1) and p-value; p_error is the p-value's standard error
/// where it was simulated, else 0.
struct ManyRatesTest {
  double statistic, df, p_value, p_error;
  ChanceBy by;
};

/// Tests equal rates by the chi-square law of the statistic.
///   counts     n groups, whole, 0 or more;   exposures  n groups, above 0
/// No events at all: statistic 0, p-value 1. Refuses too_few (one group), length_mismatch, bad_count,
/// bad_exposure. Cost: O(n).
ManyRatesTest many_rates_test(std::span<const double> counts, std::span<const double> exposures,
                              Distance distance);

struct ConditionalSpec {
  Distance distance = Distance::likelihood;
  std::uint64_t draws = 9999;
  std::uint64_t seed = default_seed;
  double most_outcomes = 2e6;  ///< enumerate while the ways to share the events out are no more than this
};

/// Tests equal rates given the sum of the counts: the chance of a distance at least as large.
/// Enumerated, it is exact. Simulated, it is (1 + as large) / (1 + draws), never 0 (Davison and Hinkley
/// 1997, section 4.2), with standard error sqrt(p (1 - p) / draws). Distances within 1e-9 of each other
/// count as equal. Refuses as many_rates_test, and bad_value with draws 0. Cost: O(groups x draws), draws
/// shared among the workers in pieces with streams of their own, so the answer is theirs alone.
ManyRatesTest conditional_rates_test(std::span<const double> counts, std::span<const double> exposures,
                                     const ConditionalSpec& spec, const Work& work);

/// Number of ways to share `events` out among `groups`, as a double.
double ways_to_share(double events, std::size_t groups);

struct PairSpec {
  RatioMethod limits = RatioMethod::exact;
  TestMethod test = TestMethod::exact;
  double confidence = 0.95;
  Side side = Side::both;
  Direction direction = Direction::either;
  Adjust adjust = Adjust::holm;
};

/// Two groups by index; the ratio is the first's rate over the second's, NaN with no events in
/// either, +infinity with none in the second. Limits are not adjusted for the number of pairs.
struct RatePair {
  std::size_t first, second;
  double ratio, low, high, p_value, p_adjusted;
};

/// Every pair, first before second, in the order (0,1), (0,2), ..., (1,2), ... Refuses as many_rates_test.
/// Cost: about 50 microseconds an exact pair.
std::vector<RatePair> all_pairs(std::span<const double> counts, std::span<const double> exposures,
                                const PairSpec& spec, const Work& work);

/// Every other group against one (Dunnett's layout, with the adjustment of `spec`): second is `reference`.
std::vector<RatePair> pairs_against(std::span<const double> counts, std::span<const double> exposures,
                                    std::size_t reference, const PairSpec& spec, const Work& work);

}  // namespace countsel
