// engine/rates/limits.hpp -- how far one rate could be from what was seen.
//
// Ten ways to put limits round a Poisson count, all divided by the exposure at the end. A Poisson tail
// is a gamma tail, so the exact, Jeffreys and Bayes limits are gamma quantiles; mid-p and likelihood
// are roots; the rest are closed forms.
// Source: named at each method below.
// Checked by: tests/engine/rates/limits_test.cpp, tests/engine/rates/coverage_test.cpp.
#pragma once

namespace countsel {

/// How limits for one rate are found.
///   exact        gamma quantiles (Garwood 1936, Biometrika 28)
///   mid_p        half of the observed count's chance in each tail (Lancaster 1961; Cohen and Yang 1994)
///   score        inverts (count - mean)^2 / mean (Rao 1948; for a Poisson mean, Molenaar 1970)
///   likelihood   inverts twice the log likelihood ratio; one-sided, its signed root (Wilks 1938)
///   jeffreys     gamma quantiles at count + 1/2; lower limit 0 at count 0 (Brown, Cai and DasGupta 2003)
///   byar         cube root of a gamma quantile; count below, count + 1 above (Breslow and Day 1987)
///   wald         count -+ z sqrt(count), cut at 0
///   log_wald     count exp(-+ z / sqrt(count)); no value at 0
///   square_root  (sqrt(count + 3/8) -+ z/2)^2 - 3/8, cut at 0 (Anscombe 1948, Biometrika 35)
///   bayes        quantiles of the posterior under a gamma prior
enum class RateMethod { exact, mid_p, score, likelihood, jeffreys, byar, wald, log_wald, square_root, bayes };

/// Which limits are wanted. One-sided: all of 1 - confidence lies on that side, the other end is the
/// edge of the possible (0 below a rate or ratio, -infinity below a difference, +infinity above).
enum class Side { both, lower, upper };

/// How the record ended: at a planned end, or at its last event.
enum class StoppedBy { time, event };

/// Gamma prior of a rate: shape >= 0, rate >= 0 in units of exposure.
struct GammaPrior {
  double shape = 0.5, rate = 0;
};

struct LimitsSpec {
  RateMethod method = RateMethod::exact;
  double confidence = 0.95;  ///< inside (0, 1); used as given
  Side side = Side::both;
  StoppedBy stopped_by = StoppedBy::time;  ///< only `exact` heeds it: both limits then have shape = count
  GammaPrior prior = {};                   ///< only `bayes` heeds it
};

/// NaN: the method has no value here. +-infinity: unbounded.
struct Limits {
  double low, high;
};

/// Limits for the rate behind a count.
///   count     events, whole, 0 or more, finite (also beyond 2^53)
///   exposure  above 0, finite
/// Returns limits in events per unit of exposure; what overflows a double is +infinity.
/// No value (NaN at the computed end): log_wald at count 0; bayes where the posterior shape is 0;
/// exact with stopped_by event at count 0. Wald at count 0 is 0 to 0, as the formula has it.
/// Refuses bad_count, bad_exposure, bad_value (confidence, prior).
/// Accuracy: 12 digits for counts to 1e9 and tails to 1e-300. Cost: O(1).
Limits rate_limits(double count, double exposure, const LimitsSpec& spec);

/// Refuses bad_value where the confidence is not inside (0, 1) or the prior is negative or not finite.
void require_limits(const LimitsSpec& spec);

enum class End { low, high };

/// One end of the limits for the mean of a count, in events; what rate_limits divides by exposure.
///   tail  the chance left beyond this end, inside (0, 1)
/// Unchecked; values and NaN as at rate_limits. `bayes` is in events per unit of exposure + prior rate.
double mean_limit(double count, End end, double tail, const LimitsSpec& spec);

/// The chance beyond each computed end: (1 - confidence) / 2, or all of it on the one side.
double tail_of(double confidence, Side side);

/// Limits for a rate whose counts vary `dispersion` times as much as a Poisson's: on the log scale,
/// rate exp(-+ t sqrt(dispersion / count)), t Student's quantile on `df` degrees of freedom (McCullagh
/// and Nelder 1989, ch. 6). An infinite df takes the normal quantile.
/// Returns NaN at the computed end where count is 0, or where df or dispersion is not above 0.
/// Refuses as rate_limits does.
Limits scaled_rate_limits(double count, double exposure, double dispersion, double df, double confidence,
                          Side side);

}  // namespace countsel
