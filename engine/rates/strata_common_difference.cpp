// engine/rates/strata_common_difference.cpp -- one difference for all strata, by profile likelihood.
//
// Under a difference d >= 0 a stratum's reference rate r maximises count1 log(r + d) + count0 log r - (r + d)
// exposure1 - r exposure0, a quadratic in r; for d < 0 the groups trade places. The profile is concave in d
// (its logarithms are of linear functions), so its slope has one root.
#include <algorithm>
#include <cmath>
#include <functional>
#include <limits>

#include "engine/numbers/distributions.hpp"
#include "engine/numbers/poisson_deviance.hpp"
#include "engine/numbers/roots.hpp"
#include "engine/numbers/sums.hpp"
#include "engine/rates/strata.hpp"
#include "engine/rates/strata_checks.hpp"

namespace countsel {
namespace {

constexpr double infinity = std::numeric_limits<double>::infinity();
constexpr double no_value = std::numeric_limits<double>::quiet_NaN();

struct Fitted {
  double rate1, rate0;
};

Fitted fitted(const TwoRates& s, double difference) {
  if (difference < 0) {
    const Fitted turned = fitted({s.count0, s.exposure0, s.count1, s.exposure1}, -difference);
    return {turned.rate0, turned.rate1};
  }
  const double exposure = s.exposure1 + s.exposure0;
  // rate0^2 - half * 2 rate0 - last = 0, all divided by the exposure.
  const double half = ((s.count1 + s.count0) / exposure - difference) / 2;
  const double last = s.count0 / exposure * difference;
  const double root = std::sqrt(half * half + last);
  const double rate0 = half > 0 ? half + root : last > 0 ? last / (root - half) : 0;
  return {rate0 + difference, rate0};
}

double slope(const TwoRates& s, double difference) {
  const Fitted rates = fitted(s, difference);
  if (difference >= 0) return (s.count1 > 0 ? s.count1 / rates.rate1 : 0) - s.exposure1;
  return s.exposure0 - (s.count0 > 0 ? s.count0 / rates.rate0 : 0);
}

double deviance(const TwoRates& s, double difference) {
  const Fitted rates = fitted(s, difference);
  return 2 * half_deviance(s.count1, rates.rate1 * s.exposure1) +
         2 * half_deviance(s.count0, rates.rate0 * s.exposure0);
}

struct Profile {
  std::vector<TwoRates> strata;  // with both sides
  double estimate = no_value, scale = 0;

  double deviance_at(double difference) const {
    Sum total;
    for (const auto& s : strata) total.add(deviance(s, difference));
    return total.value();
  }
};

Profile profile(std::span<const TwoRates> strata) {
  Profile fit;
  double least = infinity, most = -infinity;
  for (const auto& s : strata) {
    if (!two_sided(s)) continue;
    fit.strata.push_back(s);
    const double one = s.count1 / s.exposure1, zero = s.count0 / s.exposure0;
    least = std::min(least, one - zero);
    most = std::max(most, one - zero);
    // The size of a step worth trying: one event more in a stratum.
    fit.scale = std::max({fit.scale, one, zero, 1 / s.exposure1, 1 / s.exposure0});
  }
  if (fit.strata.empty()) return fit;
  const auto total_slope = [&fit](double difference) {
    Sum total;
    for (const auto& s : fit.strata) total.add(slope(s, difference));
    return total.value();
  };
  if (least == most || !(total_slope(least) > 0))
    fit.estimate = least;
  else if (!(total_slope(most) < 0))
    fit.estimate = most;
  else
    fit.estimate = bracketed_root(total_slope, least, most);
  return fit;
}

}  // namespace

CommonDifference common_difference(std::span<const TwoRates> strata, double confidence, Side side,
                                   Direction direction) {
  require_strata(strata, confidence);
  const Profile fit = profile(strata);
  if (fit.strata.empty()) return {no_value, no_value, no_value, no_value};
  const double at_estimate = fit.deviance_at(fit.estimate);
  const auto root = [&](double difference) {
    const double lost = std::max(0.0, fit.deviance_at(difference) - at_estimate);
    return std::copysign(std::sqrt(lost), difference - fit.estimate);
  };
  const double z = limit_deviate(confidence, side);
  // The difference at which the signed root is `wanted`.
  const auto limit = [&](double wanted) {
    const auto excess = [&](double difference) { return root(difference) - wanted; };
    double far = std::copysign(fit.scale, wanted);
    while ((excess(fit.estimate + far) > 0) != (wanted > 0)) far *= 2;
    return bracketed_root(excess, std::min(fit.estimate, fit.estimate + far),
                          std::max(fit.estimate, fit.estimate + far));
  };
  CommonDifference result{fit.estimate, -infinity, infinity, 1};
  if (side != Side::upper) result.low = z == 0 ? fit.estimate : limit(-z);
  if (side != Side::lower) result.high = z == 0 ? fit.estimate : limit(z);
  result.p_value = deviate_p(-root(0), direction);
  return result;
}

Homogeneity difference_homogeneity(std::span<const TwoRates> strata) {
  require_strata(strata, 0.5);
  const Profile fit = profile(strata);
  const auto df = static_cast<double>(fit.strata.size()) - 1;
  if (df < 1) return {0, 0, no_value};
  const double statistic = fit.deviance_at(fit.estimate);
  return {statistic, df, chi_square_above(statistic, df)};
}

}  // namespace countsel
