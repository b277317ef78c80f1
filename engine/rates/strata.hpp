// engine/rates/strata.hpp -- two groups compared inside each stratum, then all strata together.
//
// Every stratum has its own rates; what is common is the ratio, or the difference, between group 1 and
// group 0. Mantel and Haenszel's weights need no fitting and bear many thin strata; the conditional
// likelihood gives exact limits; a likelihood ratio asks whether one ratio fits all.
// Source: named at each function.
// Checked by: tests/engine/rates/strata_test.cpp, tests/reference/rates/strata.tsv.
#pragma once

#include <span>
#include <vector>

#include "engine/rates/adjust.hpp"
#include "engine/rates/two_rates.hpp"

namespace countsel {

// In all functions a stratum is a TwoRates whose exposures may also be 0 where the count is 0: one side
// only, which says nothing about ratio or difference. Counts whole, 0 or more. Refuses bad_count,
// bad_exposure (naming the stratum by its place, from 1), too_few (no strata), bad_value (confidence).

/// Mantel and Haenszel's estimates with the variances of Greenland and Robins, and the score test of "no
/// difference in any stratum" (chi-square with 1 df, no continuity correction).
///   ratio       sum of count1 exposure0 / exposure over sum of count0 exposure1 / exposure; limits on
///               the log scale with log_variance, NaN where either sum is 0
///   difference  weights exposure1 exposure0 / exposure; NaN limits with no events
///   statistic   signed_root squared; one-sided p-values take the signed root
/// ratio NaN with both sums 0; statistic 0 and p-value 1 with no events; all NaN if no stratum has both
/// sides. Source: Mantel and Haenszel 1959, J. Natl Cancer Inst. 22; Rothman and Boice 1979; Greenland and
/// Robins 1985, Biometrics 41, 55-68.
struct MantelHaenszel {
  double ratio, ratio_low, ratio_high, log_variance;
  double difference, difference_low, difference_high, difference_variance;
  double signed_root, statistic, p_value;
};
MantelHaenszel mantel_haenszel(std::span<const TwoRates> strata, double confidence, Side side = Side::both,
                               Direction direction = Direction::either);

/// The common ratio by maximum likelihood (conditional on each stratum's sum, or with a rate of its own in
/// each stratum: for Poisson counts the same), with limits and the test of ratio = null_ratio.
///   exact       tails of the sum of the strata's conditional binomials, two-sided twice the smaller
///   mid_p       the same with half the observed sum's chance
///   likelihood  signed root of the likelihood ratio
/// No events in group 1: ratio 0, low 0; none in group 0: ratio and high +infinity; none in
/// either: NaN, 0 and +infinity, p-value 1. Refuses bad_value for another method.
/// Accuracy: 12 digits to a million events, 10 to 1e9. Cost: O(strata + square root of events).
/// Source: Gart 1970; Breslow and Day 1987, section 4.3 (likelihood), with the binomials' sum found by
/// Fourier inversion after exponential tilting, as derived in engine/rates/strata_sum.hpp.
struct CommonRatio {
  double ratio, low, high, p_value;
};
CommonRatio common_ratio(std::span<const TwoRates> strata, RatioMethod method, double confidence,
                         Side side = Side::both, Direction direction = Direction::either,
                         double null_ratio = 1);

/// The common difference by maximum likelihood, rates kept at 0 or above, with likelihood limits and the
/// likelihood-ratio test of difference = 0. All NaN if no stratum has both sides.
/// Source: Breslow and Day 1987, section 4.3 (additive rates); profile likelihood.
struct CommonDifference {
  double difference, low, high, p_value;
};
CommonDifference common_difference(std::span<const TwoRates> strata, double confidence,
                                   Side side = Side::both, Direction direction = Direction::either);

/// The likelihood ratio of a ratio (difference) in each stratum against one for all.
/// df: strata with both sides, and for the ratio with events, less 1; with fewer than two such strata
/// statistic 0, df 0, p-value NaN. Source: Breslow and Day 1987, section 4.4 (deviance form).
struct Homogeneity {
  double statistic, df, p_value;
};
Homogeneity ratio_homogeneity(std::span<const TwoRates> strata);
Homogeneity difference_homogeneity(std::span<const TwoRates> strata);

enum class Measure { ratio, difference };
enum class StrataMethod { mantel_haenszel, exact, mid_p, likelihood };

struct StrataSpec {
  Measure measure = Measure::ratio;
  StrataMethod method = StrataMethod::mantel_haenszel;
  double confidence = 0.95;
  Side side = Side::both;
  Direction direction = Direction::either;
  Adjust adjust = Adjust::holm;
};

/// One stratum by itself: its ratio or difference with exact (mid-p, likelihood where the method says so)
/// limits and test, score limits for a difference unless by likelihood; weight is its share of Mantel and
/// Haenszel's weights. A stratum with one side only has NaN everywhere and weight 0.
struct StratumResult {
  double estimate, low, high, p_value, p_adjusted, weight;
};

/// All that a stratified comparison shows. `estimate` with its limits is the measure by the method;
/// `crude` is the same measure with the strata thrown together; statistic and p_value are Mantel and
/// Haenszel's test; method_p is the p-value that agrees with the limits (Wald's for mantel_haenszel).
/// directions_differ: some stratum's estimate lies above no difference and another's below, each with limits
/// that exclude it. Refuses bad_value for exact or mid-p limits of a difference.
struct WithinStrata {
  double estimate, low, high;
  double statistic, p_value, method_p;
  double crude;
  Homogeneity homogeneity;
  std::vector<StratumResult> strata;
  bool directions_differ;
};
WithinStrata within_strata(std::span<const TwoRates> strata, const StrataSpec& spec);

}  // namespace countsel
