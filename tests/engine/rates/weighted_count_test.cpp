// tests/engine/rates/weighted_count_test.cpp -- weighted sums of counts and their ratios.
#include "engine/rates/weighted_count.hpp"

#include <doctest/doctest.h>

#include <initializer_list>

#include "reference_rows.hpp"

namespace countsel {
namespace {

WeightedCount weighted(const std::vector<double>& weights, const std::vector<double>& counts) {
  WeightedCount sum;
  for (std::size_t i = 0; i < counts.size(); ++i) add(sum, weights[i], counts[i]);
  return sum;
}

constexpr double levels[] = {0.3, 0.9, 0.999};
constexpr Side sides[] = {Side::both, Side::lower, Side::upper};

TEST_CASE("with equal weights the gamma limits are the exact and the mid-p limits of the count") {
  for (const double count : {0.0, 1.0, 4.0, 77.0, 1e6}) {
    const auto sum = weighted({0.25, 0.25, 0.25}, {count, 0, 0});
    for (const double level : levels) {
      for (const Side side : sides) {
        for (const bool mid_p : {false, true}) {
          CAPTURE(count);
          CAPTURE(level);
          CAPTURE(mid_p);
          const Limits a = gamma_limits(sum, mid_p, level, side);
          const Limits b = rate_limits(
              count, 4, {mid_p ? RateMethod::mid_p : RateMethod::exact, level, side, StoppedBy::time, {}});
          CHECK(a.low == doctest::Approx(b.low).epsilon(1e-11));
          if (std::isinf(b.high))
            CHECK(std::isinf(a.high));
          else
            CHECK(a.high == doctest::Approx(b.high).epsilon(1e-11));
        }
      }
    }
  }
}

TEST_CASE("with equal weights the ratio's limits and tests are the conditional binomial's") {
  for (const double one : {0.0, 1.0, 6.0, 400.0}) {
    for (const double other : {0.0, 2.0, 35.0}) {
      const auto above = weighted({0.5, 0.5}, {one, 0}), below = weighted({0.2, 0.2}, {0, other});
      const TwoRates two{one, 2, other, 5};
      for (const double level : levels) {
        for (const bool mid_p : {false, true}) {
          CAPTURE(one);
          CAPTURE(other);
          CAPTURE(level);
          CAPTURE(mid_p);
          const Limits a = gamma_ratio_limits(above, below, mid_p, level, Side::both);
          const Limits b =
              ratio_limits(two, mid_p ? RatioMethod::mid_p : RatioMethod::exact, level, Side::both);
          CHECK(a.low == doctest::Approx(b.low).epsilon(1e-11));
          if (std::isinf(b.high))
            CHECK(std::isinf(a.high));
          else
            CHECK(a.high == doctest::Approx(b.high).epsilon(1e-11));
        }
      }
      for (const auto direction : {Direction::either, Direction::above, Direction::below})
        for (const bool mid_p : {false, true})
          CHECK(
              gamma_ratio_test(above, below, mid_p, direction, 0.7) ==
              doctest::Approx(ratio_test(two, mid_p ? TestMethod::mid_p : TestMethod::exact, direction, 0.7))
                  .epsilon(1e-11));
    }
  }
}

TEST_CASE("ratio limits and test agree with unequal weights") {
  const auto above = weighted({3, 0.2, 1}, {4, 9, 2}), below = weighted({1, 2, 0.1}, {1, 3, 30});
  for (const bool mid_p : {false, true}) {
    for (const double level : levels) {
      const Limits limits = gamma_ratio_limits(above, below, mid_p, level, Side::both);
      CHECK(gamma_ratio_test(above, below, mid_p, Direction::above, limits.low) ==
            doctest::Approx((1 - level) / 2).epsilon(1e-10));
      CHECK(gamma_ratio_test(above, below, mid_p, Direction::below, limits.high) ==
            doctest::Approx((1 - level) / 2).epsilon(1e-10));
    }
  }
}

TEST_CASE("limits scale with the weights and mid-p limits lie inside") {
  const std::vector<double> counts = {3, 0, 11};
  const auto one = weighted({1, 2, 0.5}, counts), ten = weighted({10, 20, 5}, counts);
  const Limits a = gamma_limits(one, false, 0.95, Side::both), b = gamma_limits(ten, false, 0.95, Side::both);
  CHECK(b.low == doctest::Approx(10 * a.low).epsilon(1e-13));
  CHECK(b.high == doctest::Approx(10 * a.high).epsilon(1e-13));
  const Limits middle = gamma_limits(one, true, 0.95, Side::both);
  CHECK(middle.low > a.low);
  CHECK(middle.high < a.high);
  const WeightedCount nothing;
  CHECK(gamma_limits(nothing, false, 0.95, Side::both).high == 0);
}

TEST_CASE("the gamma limits cover a weighted sum at least as often as they say") {
  // Enumerated over two counts; Fay and Feuer report no case below the level.
  double least = 1;
  for (const double mean1 : {0.3, 2.0, 6.0}) {
    for (const double mean2 : {0.5, 4.0}) {
      const double truth = 2 * mean1 + 0.3 * mean2;
      double covered = 0;
      for (double x = 0; x < 40; ++x)
        for (double y = 0; y < 40; ++y) {
          const Limits limits = gamma_limits(weighted({2, 0.3}, {x, y}), false, 0.95, Side::both);
          if (limits.low <= truth && truth <= limits.high)
            covered += std::exp(x * std::log(mean1) - mean1 - std::lgamma(x + 1) + y * std::log(mean2) -
                                mean2 - std::lgamma(y + 1));
        }
      least = std::min(least, covered);
    }
  }
  CHECK(least >= 0.95);
}

}  // namespace
}  // namespace countsel
