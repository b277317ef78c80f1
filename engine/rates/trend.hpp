// engine/rates/trend.hpp -- does a rate climb or fall over ordered steps?
//
// Given the sum of all counts, a rate that changes by one factor per unit of order shares the events out
// in proportion to exposure x exp(slope x order). The score test asks for slope 0 without fitting; the
// fit gives the factor, its limits and what the steps leave unexplained.
// Source: named at each field.
// Checked by: tests/engine/rates/trend_test.cpp, tests/reference/rates/trend.tsv.
#pragma once

#include <span>
#include <vector>

#include "engine/rates/limits.hpp"
#include "engine/rates/two_rates.hpp"

namespace countsel {

/// How the slope's limits are found: the estimate -+ z standard errors, the likelihood ratio, or the score
/// test at every slope (which agrees with the test of no trend).
enum class TrendMethod { likelihood, wald, score };

struct TrendSpec {
  TrendMethod method = TrendMethod::likelihood;
  double confidence = 0.95;
  Side side = Side::both;
  Direction direction = Direction::either;
};

/// log_ratio      slope of the log rate per unit of order (McCullagh and Nelder 1989, ch. 6); low, high its
///                limits; log_error its standard error by the information
/// signed_root    score test of slope 0: sum of order (count - expected) over its standard deviation given
/// the
///                sum (Armitage 1955; Breslow and Day 1987, section 3.6); statistic its square, 1 df
/// departure      likelihood ratio of a rate of its own for each step against the straight climb, steps less
/// 2
///                df (NaN p-value with two steps)
/// fitted         rates at each step under the climb
/// All events at the last (first) step: log_ratio +infinity (-infinity), its limit on that side too, the
/// other by likelihood or score (Wald: NaN), departure 0. No events: log_ratio NaN, limits -infinity and
/// +infinity, statistic 0, p-values 1, fitted 0.
struct Trend {
  double log_ratio, low, high, log_error;
  double signed_root, statistic, p_value;
  double departure_statistic, departure_df, departure_p;
  std::vector<double> fitted;
};

/// Fits a climb.
///   counts, exposures, order  n steps, two or more; exposures above 0; order increasing, any spacing (given
///                             scores, or 1, 2, 3, ... for equal steps)
/// Refuses length_mismatch, too_few, bad_count, bad_exposure, bad_value (order not increasing, confidence).
/// Cost: O(n) times some ten steps of Newton.
Trend climb(std::span<const double> counts, std::span<const double> exposures, std::span<const double> order,
            const TrendSpec& spec);

}  // namespace countsel
