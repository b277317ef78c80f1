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
    constexpr double least = std::numeric_limits<double>::min();  // further apart than a double reaches
    data.exposure1 = std::max(std::ldexp(given.exposure1, -exponent), least);
    data.exposure0 = std::max(std::ldexp(given.exposure0, -exponent), least);
  }
  double from_outside(double difference) const { return std::ldexp(difference, exponent); }
  double to_outside(double difference) const { return std::ldexp(difference, -exponent); }
};

double difference_seen(const TwoRates& d) { return cross_difference(d) / d.exposure1 / d.exposure0; }

double wald_error(const TwoRates& d) {
  return std::hypot(std::sqrt(d.count1) / d.exposure1, std::sqrt(d.count0) / d.exposure0);
}

// The fit under a difference: its multiplier, the square of the score statistic, half the likelihood ratio.
struct Restricted {
  double tau, score_square, half_deviance;
};

// Strictly inside the multiplier's range, given what it leaves of both exposures: left1 = exposure1 + tau,
// left0 = exposure0 - tau, each to its own digits. A group without events then has rate 0. Written in ratios
// of tau to exposures, which stay in range however far apart those are.
Restricted inside(const TwoRates& d, double tau, double left1, double left0) {
  Restricted fit{tau, 0, 0};
  if (d.count1 > 0) {
    fit.score_square += d.count1 * (tau / d.exposure1) * (tau / left1);
    fit.half_deviance += d.count1 * ratio_gap(d.exposure1 / left1, -tau / left1);
  }
  if (d.count0 > 0) {
    fit.score_square += d.count0 * (tau / d.exposure0) * (tau / left0);
    fit.half_deviance += d.count0 * ratio_gap(d.exposure0 / left0, tau / left0);
  }
  return fit;
}

// At the edge tau = -exposure1, where group 1 has no events and yet the rate rate1.
Restricted at_edge(const TwoRates& d, double rate1) {
  const double all = d.exposure1 + d.exposure0, expected1 = d.exposure1 * rate1;
  const double half0 = d.count0 > 0 ? d.count0 * ratio_gap(d.exposure0 / all, -d.exposure1 / all) : 0;
  return {-d.exposure1, expected1 + d.count0 * (d.exposure1 / all) * (d.exposure1 / d.exposure0),
          half0 + expected1};
}

// The fit under a difference of 0 or more. Rate 0 solves all l^2 - (n - difference all) l - difference count0
// = 0; tau is the root of difference tau^2 - b tau + c that is 0 where c is.
Restricted under_difference(const TwoRates& d, double difference) {
  const double n = d.count1 + d.count0, all = d.exposure1 + d.exposure0;
  if (d.count1 == 0) return at_edge(d, d.count0 / all + difference);
  if (d.count0 == 0) {
    if (d.count1 / all <= difference) {
      const double left1 = d.count1 / difference;
      return inside(d, left1 - d.exposure1, left1, all - left1);
    }
    const Restricted turned = at_edge(swapped(d), d.count1 / all - difference);  // group 0's edge
    return {-turned.tau, turned.score_square, turned.half_deviance};
  }
  const double b = n + difference * (d.exposure0 - d.exposure1);
  const double c = cross_difference(d) - difference * d.exposure1 * d.exposure0;
  const double excess = n - difference * all;
  const double root = std::sqrt(excess * excess + 4 * difference * d.count0 * all);
  const double rate0 = excess > 0 ? (excess + root) / (2 * all) : 2 * d.count0 * difference / (root - excess);
  return inside(d, b >= 0 ? 2 * c / (b + root) : (b - root) / (2 * difference),
                d.count1 / (rate0 + difference), d.count0 / rate0);
}

double square_of(const Restricted& fit, bool likelihood) {
  return likelihood ? 2 * fit.half_deviance : fit.score_square;
}

double deviate(const TwoRates& d, RatioMethod method, double difference) {
  if (method == RatioMethod::log_wald) return (difference_seen(d) - difference) / wald_error(d);
  const Restricted fit =
      difference < 0 ? under_difference(swapped(d), -difference) : under_difference(d, difference);
  const double size = std::sqrt(square_of(fit, method == RatioMethod::likelihood));
  return std::copysign(size, difference < 0 ? -fit.tau : fit.tau);
}

// Upper limit: the difference at which the deviate is -z. z below 0 puts it below the difference seen.
double upper(const TwoRates& d, RatioMethod method, double z) {
  const double seen = difference_seen(d), error = wald_error(d);
  if (z == 0 || std::isinf(seen)) return seen;
  if (method == RatioMethod::log_wald) return error > 0 ? seen + z * error : nan;
  if (z < 0) return -upper(swapped(d), method, -z);
  const bool likelihood = method == RatioMethod::likelihood;
  if (d.count1 == 0) {
    // No root inside: the rest of z^2 is made up by a rate of group 1 at the edge.
    const double there = square_of(at_edge(d, 0), likelihood);
    if (there <= z * z) {
      const double rate1 = (z * z - there) / d.exposure1 / (likelihood ? 2 : 1);
      return rate1 - d.count0 / (d.exposure1 + d.exposure0);
    }
  }
  // Solved for s = t / (exposure1 - t) with t = -tau, which runs from 0 to infinity.
  const auto t_of = [&](double s) { return d.exposure1 * (s / (1 + s)); };
  const auto gap = [&](double s) {
    const double t = t_of(s), share0 = t / (d.exposure0 + t), along = t / d.exposure1;
    const double square1 = d.count1 * along * s, square0 = d.count0 * (t / d.exposure0) * share0;
    const double half1 = d.count1 * log1p_gap(s);
    const double half0 = d.count0 > 0 ? d.count0 * ratio_gap(1 - share0, -share0) : 0;
    const double square = likelihood ? 2 * (half1 + half0) : square1 + square0;
    // slope of the square against log t, and of log t against log s
    const double slope = likelihood ? 2 * (d.count1 * s * s + d.count0 * share0 * share0)
                                    : square1 * (2 + s) + square0 * (2 - share0);
    return ValueSlope{std::log(square / (z * z)) / 2, slope / square / 2 / (1 + s)};
  };
  const double first = z / error / d.exposure1;
  const double s = log_newton_root(gap, first * (1 + first), 2), t = t_of(s);
  return seen + inside(d, -t, d.exposure1 / (1 + s), d.exposure0 + t).score_square / t;
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
