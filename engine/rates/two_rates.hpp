// engine/rates/two_rates.hpp -- two groups: by how much do their rates differ, and could it be chance?
//
// Given the sum of both counts, the count of group 1 is binomial with a chance that depends on the
// ratio of the rates alone; ratio limits and tests are tails of that binomial (exact, mid-p) or of its
// approximations (score, likelihood, log-Wald). The difference estimates the common part under each
// difference instead. Group 1 is compared with group 0, the reference.
// Source: named at each function.
// Checked by: tests/engine/rates/two_rates_*_test.cpp.
#pragma once

#include "engine/rates/limits.hpp"

namespace countsel {

/// Counts whole and 0 or more; exposures above 0, finite, in one unit.
struct TwoRates {
  double count1, exposure1, count0, exposure0;
};

enum class RatioMethod { exact, mid_p, score, likelihood, log_wald };
enum class TestMethod { exact, mid_p, score, likelihood, e_test };
enum class Direction { either, above, below };

/// Limits for rate 1 / rate 0.
///   exact       conditional, beta quantiles (Clopper and Pearson 1934; Przyborowski and Wilenski 1940)
///   mid_p       conditional with half the observed count's chance (Lancaster 1961)
///   score       closed form (Wilson 1927 on the conditional binomial; Gu, Ng, Tang and Schucany 2008)
///   likelihood  profile likelihood ratio, signed root one-sided
///   log_wald    NaN at the computed ends where either count is 0
/// Count 1 zero: low 0. Count 0 zero: high +infinity. Both zero: 0 and +infinity (log_wald too: NaN).
/// Refuses bad_count, bad_exposure, bad_value (confidence).
Limits ratio_limits(const TwoRates& data, RatioMethod method, double confidence, Side side);

/// Limits for rate 1 - rate 0, per unit of exposure. `likelihood` inverts the likelihood ratio and
/// `log_wald` stands for Wald's limits (NaN with both counts 0); every other method inverts the score
/// test with the rates estimated under each difference (Ng, Gu and Tang 2007, Comput. Stat. Data Anal.
/// 51), which holds at zero counts.
Limits difference_limits(const TwoRates& data, RatioMethod method, double confidence, Side side);

/// P-value of the hypothesis rate 1 / rate 0 = null_ratio, against either, a greater (above) or a smaller
/// ratio (below). Two-sided exact, mid-p: twice the smaller tail, at most 1. `e_test`: see e_test.
/// "Not worse than a margin M": Direction::below with null_ratio M. Both counts 0: 1.
/// Refuses as ratio_limits, and a null_ratio that is not above 0 and finite.
double ratio_test(const TwoRates& data, TestMethod method, Direction direction, double null_ratio = 1);

/// P-value of the hypothesis rate 1 - rate 0 = null_difference by the method of difference_limits, so that it
/// agrees with them. Both counts 0 and null_difference 0: 1 (Wald: NaN).
double difference_test(const TwoRates& data, RatioMethod method, Direction direction,
                       double null_difference = 0);

/// The statistic whose distribution the E-test estimates: the difference over its standard error with
/// the pooled rate (score) or with each group's own (unpooled).
enum class ETestStatistic { score, unpooled };

/// The E-test: the chance, with both rates at their estimate under the null, of a standardised difference at
/// least as far out (Krishnamoorthy and Thomson 2004, J. Stat. Plan. Inference 119). Countsel takes
/// `unpooled`, the statistic of their own published values; with equal exposures both are the same. A null
/// ratio scales exposure 1. Summed over both counts while their sum is at most 2e7 (under 30 ms); beyond that
/// mid-p's tails given the sum stand in, which then differ by less than 1e-5 of themselves where they are
/// above 1e-80. Both counts 0: 1. Refuses as ratio_test.
double e_test(const TwoRates& data, ETestStatistic statistic, Direction direction, double null_ratio = 1);

/// P(rate 1 > rate 0 | data), each with Jeffreys' prior: a beta tail.
double posterior_higher(const TwoRates& data);

/// The nearest ratios above and below 1 that a test would show; NaN where there is none.
struct CouldShow {
  double above, below;
};

/// With the pooled rate as the reference's, the ratios from which on this test at this level
/// (1 - confidence) shows a difference that way at least 8 times in 10. `either` looks both ways, `above` and
/// `below` one way (the other is NaN). NaN with no events; `below` is NaN where even a ratio of 0
/// would not be shown that often.
/// Power is the sum over both counts of the test's rejections, the estimate on the right side of 1; it rises
/// with the distance from 1 because the reference's rate stands still. With more than 1e6 events expected in
/// group 1 whole numbers are taken for a continuum (error below 1e-3 of the distance from 1); with more than
/// 150 expected in all, the E-test's rejections are taken to be mid-p's. Cost: 1 ms at small counts, 10 ms at
/// 1e9. Refuses as ratio_limits.
CouldShow could_show(const TwoRates& data, TestMethod method, double confidence, Direction direction);

// Counts that vary `dispersion` times as much as a Poisson's (McCullagh and Nelder 1989): limits of the ratio
// on the log scale with Student's quantile on `df`; its test the square of the same statistic as
// F on 1 and df, so that both agree (one-sided: Student's tail). The difference likewise, unlogged.
// NaN where either count is 0 (ratio) or both are (difference), or dispersion or df is not above 0.
Limits scaled_ratio_limits(const TwoRates& data, double dispersion, double df, double confidence, Side side);
double scaled_ratio_test(const TwoRates& data, double dispersion, double df, Direction direction,
                         double null_ratio = 1);
Limits scaled_difference_limits(const TwoRates& data, double dispersion, double df, double confidence,
                                Side side);
double scaled_difference_test(const TwoRates& data, double dispersion, double df, Direction direction,
                              double null_difference = 0);

}  // namespace countsel
