// engine/rates/strata_sum.hpp -- the distribution of a sum of binomials that share one rate ratio.
//
// Given each stratum's sum m of events, the events of group 1 there are binomial with odds
// ratio x exposure1 / exposure0; their sum A over the strata carries all there is to know about the
// ratio. At the estimate the mean of A is what was seen, `a`. The chances there, p(k), are found
// once by Fourier inversion; at any other ratio, exp(d) times the estimate, they are
//     p(k) exp(d (k - a)) exp(shift(d)),   shift(d) = (a - mean) d - sum over strata of m K(chance, d),
// with K(p, d) = log(1 + p (e^d - 1)) - p d, so that both tails are sums of p(k) near a with weights at most
// 1: relative accuracy holds in the far tails, and nothing grows with the number of events.
// Source: exponential tilting as in Daniels 1954; Fourier inversion on a circle through the saddlepoint.
// Checked by: tests/engine/rates/strata_sum_test.cpp (enumeration), tests/reference/rates/strata.tsv
// (mpmath).
#pragma once

#include <span>
#include <vector>

#include "engine/rates/two_rates.hpp"

namespace countsel {

/// log(1 + p (e^d - 1)) - p d with q = 1 - p: the binomial's cumulant function less its mean. 0 or
/// more; full digits near d = 0.
double centred_cumulant(double p, double q, double d);

/// One stratum's conditional binomial at the estimate.
struct TiltedStratum {
  double events, chance, other_chance;  ///< other_chance = 1 - chance, computed by itself
};

struct StrataSum {
  double seen = 0;                    ///< a: events of group 1 in strata with both sides
  double events = 0;                  ///< M: of both groups there
  double log_ratio = 0;               ///< log of the estimate
  double residual = 0;                ///< a less the mean of A there: rounding, carried along
  std::vector<TiltedStratum> strata;  ///< those with events and both sides
  double first = 0;                   ///< the k of chances[0]; only where 0 < seen < events
  std::vector<double> chances;        ///< p(k) at the estimate
};

/// Fits the ratio and, where `with_chances`, finds p(k). With seen 0 or all events the ratio is at an edge:
/// log_ratio is -+infinity, and strata carry the chances at ratio 1 instead.
StrataSum strata_sum(std::span<const TwoRates> strata, bool with_chances);

/// shift(d): the log likelihood at d from the estimate less that at the estimate; 0 or less.
double log_likelihood_shift(const StrataSum& sum, double d);

// Tails and chance of `seen` with the log ratio at estimate + d; 0 < seen < events.
double at_least_seen(const StrataSum& sum, double d);
double at_most_seen(const StrataSum& sum, double d);
double exactly_seen(const StrataSum& sum, double d);

}  // namespace countsel
