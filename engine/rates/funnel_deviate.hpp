// engine/rates/funnel_deviate.hpp -- how far out a count lies in the distribution it should have come from.
//
// Two views of the same tails: the exact p-value, twice the smaller tail with the count in it, and the
// normal deviate whose tail equals the mid-p tail, with half the count's own chance in it. The deviate
// stays finite where the tail is too small for a double.
// Source: Lancaster 1961, J. Am. Statist. Ass. 56 (mid-p); Abramowitz and Stegun 1964, 26.2.12 (far normal
// tail). Checked by: tests/engine/rates/funnel_deviate_test.cpp, tests/reference/rates/funnel.tsv.
#pragma once

namespace countsel {

/// p_value is at most 1 and may underflow to 0; z is below 0 on the low side.
struct CountDeviate {
  double lower, upper;  ///< P(X <= count), P(X >= count)
  double p_value, z;
};

/// Where a count stands among negative-binomial counts with this mean and shape (+infinity: Poisson).
///   count  whole, 0 or more;  mean  0 or more;  shape  above 0
/// A mean of 0 with a count of 0: p 1, z 0; with a count above 0: p 0, z +infinity.
/// Accuracy: p to 12 digits, z to 10. Cost: O(1), a few thousand steps where a tail underflows.
CountDeviate count_deviate(double count, double shape, double mean);

/// z with log P(Z > z) = log_tail, for log_tail below log 1/2; keeps its digits where the tail underflows.
double normal_deviate_of_log_tail(double log_tail);

}  // namespace countsel
