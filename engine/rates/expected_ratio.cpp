// engine/rates/expected_ratio.cpp -- tests and limits of observed over expected.
#include "engine/rates/expected_ratio.hpp"

#include <algorithm>
#include <cmath>
#include <limits>
#include <string>

#include "engine/numbers/distributions.hpp"
#include "engine/numbers/poisson_deviance.hpp"
#include "engine/numbers/sums.hpp"
#include "engine/rates/checks.hpp"
#include "engine/rates/weighted_count.hpp"
#include "engine/refusal.hpp"

namespace countsel {
namespace {

constexpr double infinity = std::numeric_limits<double>::infinity();
constexpr double no_value = std::numeric_limits<double>::quiet_NaN();

void require(double count, double expected) {
  require_count(count);
  if (!(expected >= 0) || std::isinf(expected))
    throw Refusal(Code::bad_value, "An expected number is a number, 0 or more.", {{"expected"}});
  if (expected == 0 && count > 0)
    throw Refusal(Code::bad_value, "Events happened where 0 were expected; their ratio has no value.",
                  {{"expected"}}, "Give the expected number with its decimals, or leave the row out.");
}

double two_tails(double p_above, double p_below, Direction direction) {
  if (direction == Direction::above) return p_above;
  if (direction == Direction::below) return p_below;
  return std::min(1.0, 2 * std::min(p_above, p_below));
}

RatioMethod ratio_method(RateMethod method) {
  switch (method) {
    case RateMethod::exact:
      return RatioMethod::exact;
    case RateMethod::mid_p:
      return RatioMethod::mid_p;
    case RateMethod::score:
      return RatioMethod::score;
    case RateMethod::likelihood:
      return RatioMethod::likelihood;
    case RateMethod::log_wald:
      return RatioMethod::log_wald;
    default:
      throw Refusal(Code::bad_value, "These limits cannot carry the doubt of an estimated expected number.",
                    {}, "Take exact, mid-p, score, likelihood or log-wald.");
  }
}

}  // namespace

double expected_test(double count, double expected, TestMethod test, Direction direction) {
  require(count, expected);
  if (test == TestMethod::e_test)
    throw Refusal(Code::bad_value, "The E-test compares two counts; here is one.", {},
                  "Take exact, mid-p, score or likelihood.");
  if (expected == 0) return 1;
  if (test == TestMethod::score || test == TestMethod::likelihood) {
    const double z =
        test == TestMethod::score ? (count - expected) / std::sqrt(expected) : deviance_root(count, expected);
    return two_tails(normal_above(z), normal_below(z), direction);
  }
  double at_least = poisson_at_least(count, expected), at_most = poisson_at_most(count, expected);
  if (test == TestMethod::mid_p) {
    // Half the count's own chance is taken off by averaging two tails: no small difference of large things.
    at_least = (at_least + poisson_at_least(count + 1, expected)) / 2;
    at_most = (at_most + poisson_at_most(count - 1, expected)) / 2;
  }
  return two_tails(at_least, at_most, direction);
}

ExpectedRatio count_over_expected(double count, double expected, const ExpectedSpec& spec) {
  const double p = expected_test(count, expected, spec.test, spec.direction);
  if (expected == 0) return {count, expected, no_value, 0, infinity, p};
  const Limits limits = rate_limits(count, expected, spec.limits);
  return {count, expected, count / expected, limits.low, limits.high, p};
}

ExpectedRatio count_over_past(const PresentAndPast& row, const ExpectedSpec& spec) {
  const TwoRates two{row.count, row.exposure, row.past_count, row.past_exposure};
  const Limits limits =
      ratio_limits(two, ratio_method(spec.limits.method), spec.limits.confidence, spec.limits.side);
  const double expected = row.past_count / row.past_exposure * row.exposure;
  const double ratio = expected > 0 ? row.count / expected : row.count > 0 ? infinity : no_value;
  return {row.count, expected, ratio, limits.low, limits.high, ratio_test(two, spec.test, spec.direction)};
}

bool pasts_share_one_ratio(std::span<const PresentAndPast> rows) {
  const double first = rows[0].exposure / rows[0].past_exposure;
  return std::all_of(rows.begin(), rows.end(), [first](const PresentAndPast& row) {
    return std::abs(row.exposure / row.past_exposure - first) <= 1e-12 * first;
  });
}

ExpectedRatio counts_over_pasts(std::span<const PresentAndPast> rows, const ExpectedSpec& spec) {
  if (rows.empty()) throw Refusal(Code::too_few, "There are no rows to compare with their past.");
  if (pasts_share_one_ratio(rows)) {
    Sum count, exposure, past_count, past_exposure;
    for (const auto& row : rows) {
      count.add(row.count);
      exposure.add(row.exposure);
      past_count.add(row.past_count);
      past_exposure.add(row.past_exposure);
    }
    return count_over_past({count.value(), exposure.value(), past_count.value(), past_exposure.value()},
                           spec);
  }
  const bool limits_fit = spec.limits.method == RateMethod::exact || spec.limits.method == RateMethod::mid_p;
  const bool test_fits = spec.test == TestMethod::exact || spec.test == TestMethod::mid_p;
  if (!limits_fit || !test_fits)
    throw Refusal(
        Code::bad_value,
        "With pasts of different length, rows taken together have exact or mid-p limits and tests only.", {},
        "Take exact or mid-p.");
  WeightedCount observed, expected;
  for (const auto& row : rows) {
    require_count(row.count);
    require_count(row.past_count, "past_count");
    require_exposure(row.exposure);
    require_exposure(row.past_exposure, "past_exposure");
    add(observed, 1, row.count);
    add(expected, row.exposure / row.past_exposure, row.past_count);
  }
  const Limits limits = gamma_ratio_limits(observed, expected, spec.limits.method == RateMethod::mid_p,
                                           spec.limits.confidence, spec.limits.side);
  const double ratio = expected.value > 0   ? observed.value / expected.value
                       : observed.value > 0 ? infinity
                                            : no_value;
  return {
      observed.value, expected.value,
      ratio,          limits.low,
      limits.high,    gamma_ratio_test(observed, expected, spec.test == TestMethod::mid_p, spec.direction)};
}

}  // namespace countsel
