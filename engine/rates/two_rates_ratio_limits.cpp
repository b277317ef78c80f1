// engine/rates/two_rates_ratio_limits.cpp -- limits for the ratio of two rates.
//
// Each method is solved for the odds that an event is group 1's, and only for the lower limit: the
// upper one is one over the lower one with the groups' places changed.
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

// Wilson's closed form as odds; the difference in its numerator is divided out. z below 0 (a one-sided
// confidence of less than a half) asks for the other root.
double score_low(double x1, double x0, double z) {
  const double n = x1 + x0, half = z * z / 2;
  const double spread = std::abs(z) * std::sqrt(x1 * (x0 / n) + half / 2);
  const double both = (x1 + half + spread) * (x0 + half + spread), grown = 1 + z * z / n;
  if (z >= 0) return x1 == 0 ? 0 : x1 / both * x1 * grown;
  return x0 == 0 ? infinity : both / x0 / x0 / grown;
}

double exact_low(double x1, double x0, double tail) {
  return x1 == 0 ? 0 : beta_quantile_odds(x1, x0 + 1, tail);
}

// P(X > x1) + P(X = x1) / 2 = tail; its slope against the log odds is P(X = x1) (x0 p + x1 q) / 2.
double mid_p_low(double x1, double x0, double tail) {
  const double n = x1 + x0;
  if (x1 == 0) return tail > 0.5 ? std::expm1(-std::log(2 * (1 - tail)) / n) : 0;
  if (x0 == 0) return tail < 0.5 ? 1 / std::expm1(-std::log(2 * tail) / n) : infinity;
  const auto gap = [&](double odds) {
    const Share share = share_of_odds(1, odds, 1);
    const double here = p_above(TestMethod::mid_p, x1, x0, share);
    if (!(here > 0)) return ValueSlope{-infinity, 1};
    const double slope = chance_of_split(x1, x0, share) * (x0 * share.chance() + x1 * share.other()) / 2;
    return ValueSlope{std::log(here / tail), slope / here};
  };
  const double guess = score_low(x1, x0, normal_upper_quantile(tail));
  return log_newton_root(gap, guess, 1 + std::sqrt(std::min(x1, x0)));
}

// log odds = log(x1 / x0) + shift with signed root of the deviance -z. With t = e^shift - 1 and s = 1 + x1 t
// / n the groups' expected over seen are (1 + t) / s and 1 / s.
double likelihood_low(double x1, double x0, double z) {
  const double n = x1 + x0;
  if (x1 == 0) return z < 0 ? std::expm1(z * z / 2 / n) : 0;
  if (x0 == 0) return z > 0 ? 1 / std::expm1(z * z / 2 / n) : infinity;
  if (z == 0) return x1 / x0;
  const auto root = [&](double shift) {
    const double t = std::expm1(shift), s = 1 + x1 / n * t;
    const double half = x1 * ratio_gap((1 + t) / s, x0 / n * t / s) + x0 * ratio_gap(1 / s, -x1 / n * t / s);
    const double signed_root = std::copysign(std::sqrt(2 * half), shift);
    return ValueSlope{signed_root + z, x1 * (x0 / n) * t / s / signed_root};
  };
  const double guess = -z * std::sqrt(1 / x1 + 1 / x0);
  double far = guess;
  while (root(far).value * z > 0 && std::abs(far) < 1e6) far *= 2;
  return x1 / x0 * std::exp(newton_root(root, guess, std::min(far, 0.0), std::max(far, 0.0)));
}

double odds_low(const TwoRates& data, RatioMethod method, double tail) {
  const double x1 = data.count1, x0 = data.count0;
  if (method == RatioMethod::log_wald) {
    if (x1 == 0 || x0 == 0) return nan;
    return x1 / x0 * std::exp(-normal_upper_quantile(tail) * std::sqrt(1 / x1 + 1 / x0));
  }
  if (x1 + x0 == 0) return 0;
  if (method == RatioMethod::exact) return exact_low(x1, x0, tail);
  if (method == RatioMethod::mid_p) return mid_p_low(x1, x0, tail);
  const double z = normal_upper_quantile(tail);
  return method == RatioMethod::score ? score_low(x1, x0, z) : likelihood_low(x1, x0, z);
}

}  // namespace

Limits ratio_limits(const TwoRates& data, RatioMethod method, double confidence, Side side) {
  require_two_rates(data);
  require_probability(confidence, "confidence");
  const double tail = tail_of(confidence, side);
  return on_side(side, ratio_of_odds(odds_low(data, method, tail), data),
                 ratio_of_odds(1 / odds_low(swapped(data), method, tail), data), 0);
}

}  // namespace countsel
