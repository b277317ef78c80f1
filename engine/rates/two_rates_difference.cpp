// engine/rates/two_rates_difference.cpp -- limits and tests for the difference of two rates.
//
// Under a difference d the estimated rates are count1 / (exposure1 + tau) and count0 / (exposure0 - tau): tau
// is the multiplier of the constraint, between -exposure1 and exposure0. With V the variance of the estimated
// difference at those rates, the difference seen lies tau V above d (put both rates into it and
// subtract), so the score statistic is tau sqrt(V) and no near-equal numbers are ever subtracted. Both it and
// the likelihood ratio rise with tau, so a limit is one root in tau. Source: Ng, Gu and Tang 2007 (the
// statistic); the form in tau derived here.
#include <algorithm>
#include <cmath>
#include <limits>

#include "engine/numbers/distributions.hpp"
#include "engine/numbers/large_shapes.hpp"
#include "engine/numbers/roots.hpp"
#include "engine/rates/checks.hpp"
#include "engine/rates/two_rates_parts.hpp"

namespace countsel {
namespace {

constexpr double infinity = std::numeric_limits<double>::infinity();
constexpr double nan = std::numeric_limits<double>::quiet_NaN();

// Exposures scaled by a power of two so that products of them stay in range; rates are per scaled exposure.
struct Scaled {
  TwoRates data;
  int exponent;  // exposure = scaled exposure times 2^exponent

  explicit Scaled(const TwoRates& given) : data(given) {
    std::frexp(std::max(given.exposure1, given.exposure0), &exponent);
    data.exposure1 = std::ldexp(given.exposure1, -exponent);
    data.exposure0 = std::ldexp(given.exposure0, -exponent);
  }
  double from_outside(double difference) const { return std::ldexp(difference, exponent); }
  double to_outside(double difference) const { return std::ldexp(difference, -exponent); }
};

double difference_seen(const TwoRates& d) { return cross_difference(d) / d.exposure1 / d.exposure0; }

double wald_variance(const TwoRates& d) {
  return d.count1 / d.exposure1 / d.exposure1 + d.count0 / d.exposure0 / d.exposure0;
}

// The fit under a difference: the multiplier, the variance V, and half the likelihood ratio.
struct Restricted {
  double tau, variance, half_deviance;
};

// At a multiplier strictly inside its range; a group without events then has rate 0.
Restricted at_multiplier(const TwoRates& d, double tau) {
  const double left1 = d.exposure1 + tau, left0 = d.exposure0 - tau;
  Restricted fit{tau, 0, 0};
  if (d.count1 > 0) {
    fit.variance += d.count1 / left1 / d.exposure1;
    fit.half_deviance += d.count1 * ratio_gap(d.exposure1 / left1, -tau / left1);
  }
  if (d.count0 > 0) {
    fit.variance += d.count0 / left0 / d.exposure0;
    fit.half_deviance += d.count0 * ratio_gap(d.exposure0 / left0, tau / left0);
  }
  return fit;
}

// At the edge tau = -exposure1, where group 1 has no events and yet the rate rate1.
Restricted at_edge(const TwoRates& d, double rate1) {
  const double all = d.exposure1 + d.exposure0, rate0 = d.count0 / all;
  const double half0 = d.count0 > 0 ? d.count0 * ratio_gap(d.exposure0 / all, -d.exposure1 / all) : 0;
  return {-d.exposure1, rate1 / d.exposure1 + rate0 / d.exposure0, half0 + d.exposure1 * rate1};
}

// The fit under a difference of 0 or more; tau is the root of d tau^2 - b tau + c that is 0 where c is.
Restricted under_difference(const TwoRates& d, double difference) {
  const double n = d.count1 + d.count0, all = d.exposure1 + d.exposure0;
  if (d.count1 == 0) return at_edge(d, d.count0 / all + difference);
  if (d.count0 == 0 && d.count1 / all > difference) {  // group 0's edge, seen from group 1
    const Restricted turned = at_edge(swapped(d), d.count1 / all - difference);
    return {-turned.tau, turned.variance, turned.half_deviance};
  }
  if (d.count0 == 0) return at_multiplier(d, d.count1 / difference - d.exposure1);
  const double b = n + difference * (d.exposure0 - d.exposure1);
  const double c = cross_difference(d) - difference * d.exposure1 * d.exposure0;
  const double excess = n - difference * all;
  const double root = std::sqrt(excess * excess + 4 * difference * d.count0 * all);
  return at_multiplier(d, b >= 0 ? 2 * c / (b + root) : (b - root) / (2 * difference));
}

double deviate_of(const Restricted& fit, bool likelihood) {
  return likelihood ? std::copysign(std::sqrt(2 * fit.half_deviance), fit.tau)
                    : fit.tau * std::sqrt(fit.variance);
}

double deviate(const TwoRates& d, RatioMethod method, double difference) {
  if (method == RatioMethod::log_wald) return (difference_seen(d) - difference) / std::sqrt(wald_variance(d));
  const bool likelihood = method == RatioMethod::likelihood;
  return difference < 0 ? -deviate_of(under_difference(swapped(d), -difference), likelihood)
                        : deviate_of(under_difference(d, difference), likelihood);
}

// Upper limit: the difference at which the deviate is -z. z below 0 puts it below the difference seen.
double upper(const TwoRates& d, RatioMethod method, double z) {
  const double seen = difference_seen(d), variance = wald_variance(d);
  if (method == RatioMethod::log_wald) return variance > 0 ? seen + z * std::sqrt(variance) : nan;
  if (z < 0) return -upper(swapped(d), method, -z) + 0.0;
  const bool likelihood = method == RatioMethod::likelihood;
  if (d.count1 == 0) {
    // No root inside: the rest of z^2 is made up by a rate of group 1 at the edge.
    const Restricted edge = at_edge(d, 0);
    const double there = likelihood ? 2 * edge.half_deviance : edge.tau * edge.tau * edge.variance;
    if (there <= z * z) {
      const double rate1 = (z * z - there) / d.exposure1 / (likelihood ? 2 : 1);
      return rate1 - d.count0 / (d.exposure1 + d.exposure0);
    }
  }
  const auto gap = [&](double t) {  // t = -tau
    const Restricted fit = at_multiplier(d, -t);
    const double here = -deviate_of(fit, likelihood);
    const double left1 = d.exposure1 - t, left0 = d.exposure0 + t;
    const double steep = d.count1 > 0 ? d.count1 / left1 / left1 : 0, flat = d.count0 / left0 / left0;
    const double slope =
        likelihood
            ? t * (steep + flat)
            : t / 2 *
                  (steep * (2 * d.exposure1 - t) / d.exposure1 + flat * (2 * d.exposure0 + t) / d.exposure0);
    return ValueSlope{here - z, here > 0 ? slope / here : std::sqrt(variance)};
  };
  const double t = newton_root(gap, z / std::sqrt(variance), 0, d.exposure1);
  return seen + t * at_multiplier(d, -t).variance;
}

}  // namespace

Limits difference_limits(const TwoRates& data, RatioMethod method, double confidence, Side side) {
  require_two_rates(data);
  require_probability(confidence, "confidence");
  const Scaled scaled(data);
  const double z = normal_upper_quantile(tail_of(confidence, side));
  return on_side(side, scaled.to_outside(-upper(swapped(scaled.data), method, z)),
                 scaled.to_outside(upper(scaled.data, method, z)), -infinity);
}

double difference_test(const TwoRates& data, RatioMethod method, Direction direction,
                       double null_difference) {
  require_two_rates(data);
  if (data.count1 + data.count0 == 0 && null_difference == 0)
    return method == RatioMethod::log_wald ? nan : 1;
  const Scaled scaled(data);
  return directed_p(direction, deviate(scaled.data, method, scaled.from_outside(null_difference)));
}

}  // namespace countsel
