// engine/rates/two_rates_parts.cpp -- checks, directions and the conditional tails of two counts.
#include "engine/rates/two_rates_parts.hpp"

#include <algorithm>
#include <cmath>
#include <limits>

#include "engine/numbers/distributions.hpp"
#include "engine/numbers/large_shapes.hpp"
#include "engine/rates/checks.hpp"

namespace countsel {

void require_two_rates(const TwoRates& data) {
  require_count(data.count1);
  require_count(data.count0);
  require_exposure(data.exposure1);
  require_exposure(data.exposure0);
}

double ratio_of_odds(double odds, const TwoRates& data) {
  if (!(odds > 0 && std::isfinite(odds))) return odds;
  int exponent_odds, exponent1, exponent0;
  const double part = std::frexp(odds, &exponent_odds) * std::frexp(data.exposure0, &exponent0) /
                      std::frexp(data.exposure1, &exponent1);
  return std::ldexp(part, exponent_odds + exponent0 - exponent1);
}

double cross_difference(const TwoRates& data) {
  return product_difference(data.count1, data.exposure0, data.count0, data.exposure1);
}

double directed_p(Direction direction, double z) {
  if (direction == Direction::above) return normal_above(z);
  if (direction == Direction::below) return normal_below(z);
  return 2 * normal_above(std::abs(z));
}

double directed_p(Direction direction, const Tails& tails) {
  if (direction == Direction::above) return tails.above;
  if (direction == Direction::below) return tails.below;
  return std::min(1.0, 2 * std::min(tails.below, tails.above));
}

double directed_student_p(Direction direction, double t, double df) {
  if (direction == Direction::above) return student_above(t, df);
  if (direction == Direction::below) return student_above(-t, df);
  return 2 * student_above(std::abs(t), df);
}

Limits on_side(Side side, double low, double high, double floor) {
  return {side == Side::upper ? floor : low,
          side == Side::lower ? std::numeric_limits<double>::infinity() : high};
}

double score_deviate(double i, double j, const Share& share) {
  return above_expected(i, j, share) / std::sqrt((i + j) * share.chance() * share.other());
}

// Half the deviance is the sum over both groups of seen log(seen / expected); the linear parts that ratio_gap
// adds cancel. A group without events leaves its expectation.
double likelihood_deviate(double i, double j, const Share& share) {
  const double excess = above_expected(i, j, share), n = i + j;
  const double mean1 = n * share.chance(), mean0 = n * share.other();
  const double half = (i > 0 ? i * ratio_gap(mean1 / i, -excess / i) : mean1) +
                      (j > 0 ? j * ratio_gap(mean0 / j, excess / j) : mean0);
  return std::copysign(std::sqrt(2 * half), excess);
}

double chance_of_split(double i, double j, const Share& share) {
  if (i == 0 || j == 0) return binomial_exactly(i, i + j, share);
  return beta_front(i, j, share) * (1 / i + 1 / j);
}

// P(X >= i) of i + j trials is a beta tail with shapes i and j + 1, for real i and j as well.
double p_above(TestMethod method, double i, double j, const Share& share) {
  if (i + j == 0) return 1;
  switch (method) {
    case TestMethod::score:
      return normal_above(score_deviate(i, j, share));
    case TestMethod::likelihood:
      return normal_above(likelihood_deviate(i, j, share));
    case TestMethod::exact:
      return i == 0 ? 1 : beta_tails(i, j + 1, share).below;
    case TestMethod::mid_p:
    case TestMethod::e_test:
      break;
  }
  const double beyond = j == 0 ? 0 : beta_tails(i + 1, j, share).below;
  return beyond + chance_of_split(i, j, share) / 2;
}

}  // namespace countsel
