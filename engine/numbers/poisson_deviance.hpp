// engine/numbers/poisson_deviance.hpp -- how far a count lies from a mean, on the likelihood's scale.
//
// count log(count / mean) - (count - mean) is a small difference of large things near the mean; a series in
// (count - mean) / (count + mean) keeps its digits there.
// Source: Loader 2000, Fast and accurate computation of binomial probabilities (the function D0).
// Checked by: tests/engine/numbers/poisson_deviance_test.cpp.
#pragma once

namespace countsel {

/// Half the Poisson deviance: the log likelihood lost when the mean is `mean` instead of `count`.
///   count  0 or more, need not be whole;   mean  0 or more
/// Returns 0 or more, 0 exactly when count = mean; +infinity where mean is 0 and count is not.
/// Accuracy: 14 digits.
double half_deviance(double count, double mean);

/// The likelihood ratio's signed root, sqrt(2 half_deviance) with the sign of count - mean.
double deviance_root(double count, double mean);

/// log P(X = count) for a Poisson X, also where the probability underflows; count whole.
double log_poisson(double count, double mean);

}  // namespace countsel
