// engine/rates/expected_ratio.hpp -- is a count above or below what was expected?
//
// With a fixed expected number the count's limits divided by it are the ratio's. An expected number
// that is itself an estimate, made from a past count, is a second Poisson count: given the sum of both, the
// new count is binomial (one past), or nearly so with the weighted past's effective count (several pasts).
// Source: Breslow and Day 1987, section 2.3 (observed over expected); Silcocks, J. Epidemiol. Community
// Health 48 (1994) 313-317 (an expected number that is not free of error).
// Checked by: tests/engine/rates/expected_ratio_test.cpp, tests/reference/rates/expected_ratio.tsv.
#pragma once

#include <span>

#include "engine/rates/limits.hpp"
#include "engine/rates/two_rates.hpp"

namespace countsel {

struct ExpectedSpec {
  TestMethod test = TestMethod::exact;  ///< exact, mid_p, score or likelihood
  Direction direction = Direction::either;
  LimitsSpec limits;
};

/// Observed over expected. With an expected number of 0 (and so no events) the ratio is NaN, its limits
/// 0 and +infinity, the p-value 1.
struct ExpectedRatio {
  double count, expected, ratio, low, high, p_value;
};

/// P-value of the hypothesis that the count's mean is `expected`, against either, a greater or a smaller.
///   count     whole, 0 or more;   expected  0 or more, finite
/// Two-sided exact and mid-p: twice the smaller tail, at most 1, so that they agree with the limits.
/// Score: (count - expected)^2 / expected; likelihood: twice the log likelihood ratio, one-sided its signed
/// root. Refuses bad_count, bad_value (expected 0 with events, or not a number; the E-test).
double expected_test(double count, double expected, TestMethod test, Direction direction);

/// A count against a fixed expected number. Refuses as expected_test and rate_limits do. For several rows
/// together give the sums.
ExpectedRatio count_over_expected(double count, double expected, const ExpectedSpec& spec);

/// A present count and exposure, and the past that says what to expect.
struct PresentAndPast {
  double count, exposure, past_count, past_exposure;
};

/// A count against the number expected from the past, past_count / past_exposure x exposure. Limits and
/// test are those of the ratio of the two rates and carry the doubt of both. Limits may be exact, mid_p,
/// score, likelihood or log_wald; refuses bad_value for another, and as ratio_limits does.
ExpectedRatio count_over_past(const PresentAndPast& row, const ExpectedSpec& spec);

/// Is exposure / past exposure the same in all rows, to rounding?
bool pasts_share_one_ratio(std::span<const PresentAndPast> rows);

/// Several rows together: the sum of counts over the sum of expected numbers. Where exposure / past exposure
/// is the same in all rows this is count_over_past of the sums; where it is not, the expected sum is a
/// weighted sum of Poisson counts, matched by its first two moments as engine/rates/weighted_count.hpp
/// says, and limits and test may be exact or mid_p (refuses bad_value for another).
ExpectedRatio counts_over_pasts(std::span<const PresentAndPast> rows, const ExpectedSpec& spec);

}  // namespace countsel
