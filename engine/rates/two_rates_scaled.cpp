// engine/rates/two_rates_scaled.cpp -- two rates whose counts vary more than a Poisson's.
//
// The variance of a count is `dispersion` times its mean, and the dispersion was itself estimated on df
// degrees of freedom, so Student's quantile stands where the normal one stood.
// Source: McCullagh and Nelder 1989, ch. 6 and 9.
#include <cmath>
#include <limits>

#include "engine/numbers/distributions.hpp"
#include "engine/rates/checks.hpp"
#include "engine/rates/two_rates_parts.hpp"

namespace countsel {
namespace {

constexpr double infinity = std::numeric_limits<double>::infinity();
constexpr double nan = std::numeric_limits<double>::quiet_NaN();

struct Estimate {
  double value, error;  // NaN where there is none
};

bool usable(double dispersion, double df) { return dispersion > 0 && df > 0; }

// The standard error of the log ratio; NaN where there is none.
double log_ratio_error(const TwoRates& data, double dispersion, double df) {
  if (data.count1 == 0 || data.count0 == 0 || !usable(dispersion, df)) return nan;
  return std::sqrt(dispersion * (1 / data.count1 + 1 / data.count0));
}

Estimate difference(const TwoRates& data, double dispersion, double df) {
  const double variance =
      data.count1 / data.exposure1 / data.exposure1 + data.count0 / data.exposure0 / data.exposure0;
  if (!(variance > 0) || !usable(dispersion, df)) return {nan, nan};
  return {cross_difference(data) / data.exposure1 / data.exposure0, std::sqrt(dispersion * variance)};
}

}  // namespace

Limits scaled_ratio_limits(const TwoRates& data, double dispersion, double df, double confidence, Side side) {
  require_two_rates(data);
  require_probability(confidence, "confidence");
  const double error = log_ratio_error(data, dispersion, df);
  if (std::isnan(error)) return on_side(side, nan, nan, 0);
  const double t = student_upper_quantile(tail_of(confidence, side), df), seen = data.count1 / data.count0;
  return on_side(side, ratio_of_odds(seen * std::exp(-t * error), data),
                 ratio_of_odds(seen * std::exp(t * error), data), 0);
}

double scaled_ratio_test(const TwoRates& data, double dispersion, double df, Direction direction,
                         double null_ratio) {
  require_two_rates(data);
  require_positive(null_ratio, "null ratio");
  const double error = log_ratio_error(data, dispersion, df);
  if (std::isnan(error)) return nan;
  // log(seen / expected odds): near 1 through the excess, which is exact there, elsewhere through the odds.
  const Share share = share_under(data, null_ratio);
  const double expected = data.count0 * share.chance() / share.other();
  const double excess = above_expected(data.count1, data.count0, share) / share.other() / expected;
  const double log_ratio = std::abs(excess) < 0.5 ? std::log1p(excess) : std::log(data.count1 / expected);
  return directed_student_p(direction, log_ratio / error, df);
}

Limits scaled_difference_limits(const TwoRates& data, double dispersion, double df, double confidence,
                                Side side) {
  require_two_rates(data);
  require_probability(confidence, "confidence");
  const Estimate seen = difference(data, dispersion, df);
  if (std::isnan(seen.error)) return on_side(side, nan, nan, -infinity);
  const double spread = student_upper_quantile(tail_of(confidence, side), df) * seen.error;
  return on_side(side, seen.value - spread, seen.value + spread, -infinity);
}

double scaled_difference_test(const TwoRates& data, double dispersion, double df, Direction direction,
                              double null_difference) {
  require_two_rates(data);
  const Estimate seen = difference(data, dispersion, df);
  if (std::isnan(seen.error)) return nan;
  return directed_student_p(direction, (seen.value - null_difference) / seen.error, df);
}

}  // namespace countsel
