// engine/rates/weighted_count.hpp -- limits for a weighted sum of Poisson counts, and for the ratio of two.
//
// A weighted sum is treated as gamma: below it one whose mean and variance are the sum's, above it one that
// has seen another event at the largest weight. With equal weights both are exact (Garwood), and the
// ratio of two becomes the conditional binomial's (Clopper and Pearson). The mid-p form takes
// either with even chances.
// Source: Fay and Feuer, Statist. Med. 16 (1997) 791-801; Fay, Commun. Statist. Theory Meth. 28 (1999)
// 2141-2160 (ratio, by the F distribution); Fay and Kim, Biometrical J. 59 (2017) 377-387 (mid-p); the
// ratio's mid-p form is ours, the mean of the tails of both exact pairings.
// Checked by: tests/engine/rates/weighted_count_test.cpp, tests/reference/rates/standardise.tsv.
#pragma once

#include <span>

#include "engine/rates/limits.hpp"
#include "engine/rates/two_rates.hpp"

namespace countsel {

/// value = sum of w x, variance = sum of w^2 x, largest = greatest w of all, also where x is 0.
struct WeightedCount {
  double value = 0, variance = 0, largest = 0;
};

/// Adds one count with its weight (0 or more; a weight of 0 adds nothing).
void add(WeightedCount& sum, double weight, double count);

/// Gamma limits for the sum's expectation; mid_p for Fay and Kim's. Value 0: low 0 and high from one event
/// at the largest weight. 0 to 0 if there is no weight at all.
Limits gamma_limits(const WeightedCount& sum, bool mid_p, double confidence, Side side);

/// Limits for the ratio of two such expectations. Upper value 0: low 0; lower value 0: high +infinity.
Limits gamma_ratio_limits(const WeightedCount& above, const WeightedCount& below, bool mid_p,
                          double confidence, Side side);

/// P-value of the hypothesis that the ratio is `null_ratio`; agrees with gamma_ratio_limits. Both values
/// 0: 1.
double gamma_ratio_test(const WeightedCount& above, const WeightedCount& below, bool mid_p,
                        Direction direction, double null_ratio = 1);

}  // namespace countsel
