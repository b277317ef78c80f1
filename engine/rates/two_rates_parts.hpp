// engine/rates/two_rates_parts.hpp -- what the comparisons of two rates share.
//
// Internal to engine/rates/two_rates_*.cpp. Everything conditional is written for group 1 above group 0; the
// other side follows by changing the groups' places, which turns a ratio over and a difference round.
// Checked by: tests/engine/rates/two_rates_*_test.cpp.
#pragma once

#include "engine/numbers/share.hpp"
#include "engine/rates/two_rates.hpp"

namespace countsel {

/// Refuses bad_count and bad_exposure, naming count and exposure.
void require_two_rates(const TwoRates& data);

inline TwoRates swapped(const TwoRates& data) {
  return {data.count0, data.exposure0, data.count1, data.exposure1};
}

/// The chance that an event is group 1's when rate 1 / rate 0 = ratio.
inline Share share_under(const TwoRates& data, double ratio) {
  return share_of_odds(ratio, data.exposure1, data.exposure0);
}

/// odds times exposure0 / exposure1 without overflow on the way.
double ratio_of_odds(double odds, const TwoRates& data);

/// rate 1 - rate 0 times both exposures: count1 exposure0 - count0 exposure1, to the last place.
double cross_difference(const TwoRates& data);

/// P-value of a signed normal deviate (above 0: the ratio looks too large).
double directed_p(Direction direction, double z);
/// P-value from both tails at what was seen: `above` small where the ratio looks too large.
double directed_p(Direction direction, const Tails& tails);
/// P-value of a signed deviate that follows Student's t.
double directed_student_p(Direction direction, double t, double df);

/// low and high with the end that is not asked for at the edge of the possible.
Limits on_side(Side side, double low, double high, double floor);

/// P-value against a larger ratio of counts i and j, real and 0 or more, at the share of the null. Falls
/// as i grows. `e_test` is answered by mid-p, its neighbour at large counts.
double p_above(TestMethod method, double i, double j, const Share& share);

/// The chance that of i + j events i are group 1's; also where the sum of i and j is not a double.
double chance_of_split(double i, double j, const Share& share);

/// The E-test's two-sided value given the sum of i and j, real: mid-p's tail at what was seen and at the
/// point whose statistic lies as far out on the other side. Differs from the full sum by the order of 1 / (i
/// + j).
double e_test_given_sum(double i, double j, const Share& share, ETestStatistic kind);

/// The score and the signed root of the likelihood ratio for counts i and j at the share of the null.
double score_deviate(double i, double j, const Share& share);
double likelihood_deviate(double i, double j, const Share& share);

}  // namespace countsel
