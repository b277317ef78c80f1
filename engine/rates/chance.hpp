// engine/rates/chance.hpp -- chances for a count still to come.
//
// The count to come is Poisson, or negative binomial where rates are known to wander; where its mean comes
// from a past record, what that record leaves in doubt is mixed in. A gamma posterior makes the mixture
// of Poisson counts negative binomial again, so that its tails are exact; with overdispersion on top the
// mixture is summed over the posterior.
// Source: Bernardo and Smith 1994, Bayesian Theory, appendix A.2 (the gamma mixture of Poisson counts);
// Jeffreys' prior for a Poisson mean, shape 1/2. Checked by: tests/engine/rates/chance_test.cpp,
// tests/reference/rates/chance.tsv.
#pragma once

#include <cstddef>
#include <vector>

namespace countsel {

/// The distribution of a count to come: negative-binomial counts of one shape (+infinity: Poisson), their
/// mean certain, or one of several with these log weights.
struct CountToCome {
  double shape;
  std::vector<double> means, log_weights;  ///< weights add up to 1; a single mean has log weight 0
  double mean, sd;                         ///< of the whole
};

/// A count with this mean. overdispersion: variance = mean + overdispersion x mean^2; 0 is Poisson.
/// Refuses bad_value (expected not 0 or more and finite; overdispersion below 0 or not finite).
CountToCome count_to_come(double expected, double overdispersion = 0);

/// A count over `next_exposure` after `count` events over `exposure`, the rate having a gamma posterior of
/// shape count + 1/2 and rate `exposure`: negative binomial with that shape and mean shape x next / exposure.
/// With overdispersion the past count and the one to come each wander with it; the posterior (Jeffreys' prior
/// of the negative binomial's mean) is then summed over a fine grid, to about 10 digits.
/// Refuses bad_count, bad_exposure (either exposure), bad_value (overdispersion).
CountToCome count_to_come_after(double count, double exposure, double next_exposure,
                                double overdispersion = 0);

double chance_at_most(const CountToCome& to_come, double k);
double chance_at_least(const CountToCome& to_come, double k);
double chance_exactly(const CountToCome& to_come, double k);
/// P(low <= X <= high), both ends included; 0 where high is below low. Taken on the side of the smaller
/// tail, so that it keeps its digits far out.
double chance_between(const CountToCome& to_come, double low, double high);

/// Equal-tailed range that holds the count with at least `confidence`: the smallest k with
/// P(X <= k) >= (1 - confidence) / 2, and the smallest with P(X > k) <= (1 - confidence) / 2.
/// Refuses bad_value (confidence outside (0, 1)).
struct LikelyRange {
  double low, high;
};
LikelyRange likely_range(const CountToCome& to_come, double confidence);

/// Values to list: all but 1e-4 of the chance on each side, and `from`, `to` where given (pass NaN for none),
/// thinned to whole steps where there are more than `most`.
struct CountChances {
  std::vector<double> value, chance, at_most;
  double step;  ///< 1 unless thinned
};
CountChances list_chances(const CountToCome& to_come, double from, double to, std::size_t most = 2000);

}  // namespace countsel
