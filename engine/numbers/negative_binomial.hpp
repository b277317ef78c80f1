// engine/numbers/negative_binomial.hpp -- counts whose rate itself varies, as a gamma does.
//
// Known by its mean and by the shape of the gamma: variance = mean + mean^2 / shape, so that an infinite
// shape is a Poisson count. Its tails are beta tails at the share mean : shape, which is never rounded to one
// number; its log chance is built from deviances, never from differences of large log gammas.
// Source: Johnson, Kemp and Kotz 2005, Univariate Discrete Distributions, 5.6 (tails as beta tails);
// Loader 2000, Fast and accurate computation of binomial probabilities (deviances).
// Checked by: tests/engine/numbers/negative_binomial_test.cpp, tests/reference/numbers/negative_binomial.tsv.
#pragma once

namespace countsel {

// shape > 0, +infinity for a Poisson count; mean >= 0, finite; k whole.
// Accuracy: 12 digits for counts to 1e9 and tails to 1e-300.
double negative_binomial_exactly(double k, double shape, double mean);      ///< P(X = k)
double negative_binomial_log_exactly(double k, double shape, double mean);  ///< log P(X = k)
double negative_binomial_at_most(double k, double shape, double mean);      ///< P(X <= k); 0 for k < 0
double negative_binomial_at_least(double k, double shape, double mean);     ///< P(X >= k); 1 for k <= 0

/// The smallest k with P(X <= k) >= p, 0 < p < 1.
double negative_binomial_quantile(double p, double shape, double mean);
/// The smallest k with P(X > k) <= q, 0 < q < 1: an upper quantile that keeps its digits as q goes to 0.
double negative_binomial_upper_quantile(double q, double shape, double mean);

/// digamma(a + k) - digamma(a), the sum of 1 / (a + j) over j < k, without the loss of subtracting. a > 0; k
/// whole, 0 or more.
double digamma_rise(double a, double k);

/// Slope of the log chance of y in `spread` = 1 / shape. At spread 0 it is its limit ((y - mean)^2 - y) / 2,
/// the score of a Poisson count against more spread. spread >= 0, mean > 0. Accuracy: 12 digits of its
/// largest part.
double negative_binomial_spread_slope(double y, double spread, double mean);

}  // namespace countsel
