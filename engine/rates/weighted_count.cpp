// engine/rates/weighted_count.cpp -- gamma laws for one weighted sum, beta-prime laws for the ratio of two.
#include "engine/rates/weighted_count.hpp"

#include <algorithm>
#include <cmath>
#include <limits>

#include "engine/numbers/distributions.hpp"
#include "engine/numbers/roots.hpp"

namespace countsel {
namespace {

constexpr double infinity = std::numeric_limits<double>::infinity();

// scale x Gamma(a), or scale x Gamma(a) / Gamma(b) where b > 0; scale 0 or infinity: all of it there.
struct Law {
  double a, b, scale;
};

bool at_an_edge(const Law& law) { return law.scale == 0 || std::isinf(law.scale); }

double below(const Law& law, double t) {
  if (at_an_edge(law)) return law.scale == 0 ? 1 : 0;
  const double x = t / law.scale;
  if (law.b == 0) return gamma_below(law.a, x);
  return x < 1 ? beta_below(law.a, law.b, x / (1 + x)) : beta_above(law.b, law.a, 1 / (1 + x));
}

double above(const Law& law, double t) {
  if (at_an_edge(law)) return law.scale == 0 ? 0 : 1;
  const double x = t / law.scale;
  if (law.b == 0) return gamma_above(law.a, x);
  return x < 1 ? beta_above(law.a, law.b, x / (1 + x)) : beta_below(law.b, law.a, 1 / (1 + x));
}

// A beta quantile turned into odds from whichever of x and 1 - x is the smaller.
double odds(double x, double one_less_x) { return x < 0.5 ? x / (1 - x) : (1 - one_less_x) / one_less_x; }

double quantile(const Law& law, double p) {
  if (at_an_edge(law)) return law.scale;
  if (law.b == 0) return law.scale * gamma_quantile(law.a, p);
  return law.scale * odds(beta_quantile(law.a, law.b, p), beta_upper_quantile(law.b, law.a, p));
}

double upper_quantile(const Law& law, double q) {
  if (at_an_edge(law)) return law.scale;
  if (law.b == 0) return law.scale * gamma_upper_quantile(law.a, q);
  return law.scale * odds(beta_upper_quantile(law.a, law.b, q), beta_quantile(law.b, law.a, q));
}

// The value below which, or above which, the mean of two laws' chances is `tail`.
double mixed_quantile(const Law& one, const Law& two, double tail, bool upper) {
  const auto chance = upper ? above : below;
  const auto inverse = upper ? upper_quantile : quantile;
  if (at_an_edge(one) || at_an_edge(two)) {
    // Half of the chance stands at 0 or at infinity; the other half is a law.
    const Law& edge = at_an_edge(one) ? one : two;
    const Law& law = at_an_edge(one) ? two : one;
    const double rest = 2 * tail - chance(edge, 1);
    if (at_an_edge(law)) return edge.scale == law.scale ? edge.scale : upper == (tail >= 0.5) ? 0 : infinity;
    if (rest <= 0) return upper ? infinity : 0;
    if (rest >= 1) return upper ? 0 : infinity;
    return inverse(law, rest);
  }
  const double first = inverse(one, tail), second = inverse(two, tail);
  if (first == second) return first;
  const auto excess = [&](double t) { return std::log((chance(one, t) + chance(two, t)) / (2 * tail)); };
  return bracketed_root(excess, std::min(first, second), std::max(first, second));
}

Law seen(const WeightedCount& sum) {
  if (!(sum.value > 0)) return {0, 0, 0};
  return {sum.value / sum.variance * sum.value, 0, sum.variance / sum.value};
}

Law one_more(const WeightedCount& sum) {
  if (!(sum.largest > 0)) return {0, 0, 0};
  const double value = sum.value + sum.largest;
  const double variance = sum.variance + sum.largest * sum.largest;
  return {value / variance * value, 0, variance / value};
}

Law over(const Law& upper, const Law& lower) { return {upper.a, lower.a, upper.scale / lower.scale}; }

// The two laws whose tails are the low and the high limit.
struct Pair {
  Law low, high;
};

Pair laws(const WeightedCount& sum) { return {seen(sum), one_more(sum)}; }
Pair laws(const WeightedCount& above, const WeightedCount& below) {
  return {over(seen(above), one_more(below)), over(one_more(above), seen(below))};
}

Limits limits_of(const Pair& laws, bool mid_p, double confidence, Side side) {
  const double tail = side == Side::both ? (1 - confidence) / 2 : 1 - confidence;
  Limits limits{0, infinity};
  if (side != Side::upper)
    limits.low = mid_p ? mixed_quantile(laws.low, laws.high, tail, false) : quantile(laws.low, tail);
  if (side != Side::lower)
    limits.high = mid_p ? mixed_quantile(laws.low, laws.high, tail, true) : upper_quantile(laws.high, tail);
  return limits;
}

}  // namespace

void add(WeightedCount& sum, double weight, double count) {
  sum.value += weight * count;
  sum.variance += weight * weight * count;
  sum.largest = std::max(sum.largest, weight);
}

Limits gamma_limits(const WeightedCount& sum, bool mid_p, double confidence, Side side) {
  return limits_of(laws(sum), mid_p, confidence, side);
}

Limits gamma_ratio_limits(const WeightedCount& above, const WeightedCount& below, bool mid_p,
                          double confidence, Side side) {
  return limits_of(laws(above, below), mid_p, confidence, side);
}

double gamma_ratio_test(const WeightedCount& numerator, const WeightedCount& denominator, bool mid_p,
                        Direction direction, double null_ratio) {
  if (numerator.value == 0 && denominator.value == 0) return 1;
  const auto [low, high] = laws(numerator, denominator);
  double p_above = below(low, null_ratio), p_below = above(high, null_ratio);
  if (mid_p) {
    p_above = (p_above + below(high, null_ratio)) / 2;
    p_below = (p_below + above(low, null_ratio)) / 2;
  }
  if (direction == Direction::above) return p_above;
  if (direction == Direction::below) return p_below;
  return std::min(1.0, 2 * std::min(p_above, p_below));
}

}  // namespace countsel
