// engine/rates/strata_common_ratio.cpp -- one ratio for all strata, from the sum of their binomials.
#include <algorithm>
#include <cmath>
#include <functional>
#include <limits>

#include "engine/numbers/distributions.hpp"
#include "engine/numbers/poisson_deviance.hpp"
#include "engine/numbers/roots.hpp"
#include "engine/numbers/sums.hpp"
#include "engine/rates/checks.hpp"
#include "engine/rates/strata.hpp"
#include "engine/rates/strata_checks.hpp"
#include "engine/rates/strata_sum.hpp"
#include "engine/refusal.hpp"

namespace countsel {
namespace {

constexpr double infinity = std::numeric_limits<double>::infinity();
constexpr double no_value = std::numeric_limits<double>::quiet_NaN();

// The chance of at least (or at most) what was seen, d from the estimate, for one method. By likelihood
// it is the normal tail of the signed root.
double tail(const StrataSum& sum, RatioMethod method, bool at_least, double d) {
  if (method == RatioMethod::likelihood) {
    const double root = std::copysign(std::sqrt(-2 * log_likelihood_shift(sum, d)), d);
    return at_least ? normal_below(root) : normal_above(root);
  }
  const double chance = at_least ? at_least_seen(sum, d) : at_most_seen(sum, d);
  return method == RatioMethod::exact ? chance : std::max(0.0, chance - exactly_seen(sum, d) / 2);
}

// d at which the tail is `wanted`: the tail of "at least" rises with d, that of "at most" falls.
double limit(const StrataSum& sum, RatioMethod method, bool at_least, double wanted) {
  const auto excess = [&](double d) { return std::log(tail(sum, method, at_least, d) / wanted); };
  double information = 0;
  for (const auto& s : sum.strata) information += s.events * s.chance * s.other_chance;
  double step = 1 / std::sqrt(information);
  const double here = excess(0);
  if (here == 0) return 0;
  // Away from the estimate until the sign turns.
  if ((here > 0) == at_least) step = -step;
  double near = 0, far = step;
  while ((excess(far) > 0) == (here > 0) && std::abs(far) < 1e4) {
    near = far;
    far *= 2;
  }
  return bracketed_root(excess, std::min(near, far), std::max(near, far));
}

CommonRatio inside(const StrataSum& sum, RatioMethod method, double alpha, Side side, Direction direction,
                   double null_ratio) {
  CommonRatio result{std::exp(sum.log_ratio), 0, infinity, 1};
  if (side != Side::upper) result.low = std::exp(sum.log_ratio + limit(sum, method, true, alpha));
  if (side != Side::lower) result.high = std::exp(sum.log_ratio + limit(sum, method, false, alpha));
  const double d = std::log(null_ratio) - sum.log_ratio;
  const double above = tail(sum, method, true, d), below = tail(sum, method, false, d);
  result.p_value = direction == Direction::above   ? above
                   : direction == Direction::below ? below
                                                   : std::min(1.0, 2 * std::min(above, below));
  return result;
}

// No events in group 1: everything is known of P(A = 0 | ratio) = prod (1 + ratio exposure1 / exposure0)^-m.
CommonRatio at_zero(const StrataSum& sum, RatioMethod method, double alpha, Side side, Direction direction,
                    double null_ratio) {
  const auto log_chance = [&](double ratio) {
    Sum total;
    for (const auto& s : sum.strata) total.add(-s.events * std::log1p(ratio * s.chance / s.other_chance));
    return total.value();
  };
  // The log chance at which the method's tail is `alpha`.
  double wanted = method == RatioMethod::exact ? std::log(alpha) : std::log(2 * alpha);
  if (method == RatioMethod::likelihood) {
    const double z = normal_upper_quantile(alpha);
    wanted = -z * std::max(0.0, z) / 2;
  }
  CommonRatio result{0, 0, infinity, 1};
  if (side != Side::lower) {
    result.high = 0;
    if (wanted < 0) {
      const auto excess = [&](double log_ratio) { return log_chance(std::exp(log_ratio)) - wanted; };
      double low = std::log(-wanted / sum.events), high = low;
      for (double step = 1; excess(low) < 0; step *= 2) low -= step;
      for (double step = 1; excess(high) > 0 && high < 1e4; step *= 2) high += step;
      result.high = std::exp(bracketed_root(excess, low, high));
    }
  }
  const double chance = std::exp(log_chance(null_ratio));
  double below = chance, above = 1;
  if (method == RatioMethod::mid_p) {
    below = chance / 2;
    above = 1 - chance / 2;
  } else if (method == RatioMethod::likelihood) {
    below = normal_below(-std::sqrt(-2 * log_chance(null_ratio)));
    above = 1 - below;
  }
  result.p_value = direction == Direction::above   ? above
                   : direction == Direction::below ? below
                                                   : std::min(1.0, 2 * std::min(above, below));
  return result;
}

// No events in group 0: the groups trade places.
CommonRatio at_infinity(StrataSum sum, RatioMethod method, double alpha, Side side, Direction direction,
                        double null_ratio) {
  for (auto& s : sum.strata) std::swap(s.chance, s.other_chance);
  const auto turned_side = side == Side::lower ? Side::upper : side == Side::upper ? Side::lower : Side::both;
  const auto turned = direction == Direction::above   ? Direction::below
                      : direction == Direction::below ? Direction::above
                                                      : Direction::either;
  const CommonRatio other = at_zero(sum, method, alpha, turned_side, turned, 1 / null_ratio);
  return {infinity, side == Side::upper ? 0 : 1 / other.high, infinity, other.p_value};
}

}  // namespace

CommonRatio common_ratio(std::span<const TwoRates> strata, RatioMethod method, double confidence, Side side,
                         Direction direction, double null_ratio) {
  require_strata(strata, confidence);
  require_positive(null_ratio, "null_ratio");
  if (method != RatioMethod::exact && method != RatioMethod::mid_p && method != RatioMethod::likelihood)
    throw Refusal(Code::bad_value, "A common ratio has exact, mid-p or likelihood limits.");
  const StrataSum sum = strata_sum(strata, method != RatioMethod::likelihood);
  if (sum.events == 0) return {no_value, 0, infinity, 1};
  const double alpha = side == Side::both ? (1 - confidence) / 2 : 1 - confidence;
  const auto answer = sum.seen == 0 ? at_zero : inside;
  if (sum.seen == sum.events) return at_infinity(sum, method, alpha, side, direction, null_ratio);
  return answer(sum, method, alpha, side, direction, null_ratio);
}

Homogeneity ratio_homogeneity(std::span<const TwoRates> strata) {
  require_strata(strata, 0.5);
  const StrataSum sum = strata_sum(strata, false);
  const auto df = static_cast<double>(sum.strata.size()) - 1;
  if (df < 1) return {0, 0, no_value};
  if (sum.seen == 0 || sum.seen == sum.events) return {0, df, 1};
  Sum statistic;
  std::size_t next = 0;
  for (const auto& s : strata) {
    if (!(two_sided(s) && s.count1 + s.count0 > 0)) continue;
    const auto& at = sum.strata[next++];
    statistic.add(2 * half_deviance(s.count1, at.events * at.chance));
    statistic.add(2 * half_deviance(s.count0, at.events * at.other_chance));
  }
  return {statistic.value(), df, chi_square_above(statistic.value(), df)};
}

}  // namespace countsel
