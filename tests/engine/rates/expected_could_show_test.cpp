// tests/engine/rates/expected_could_show_test.cpp -- the power at the ratios named, summed count by count.
#include "engine/rates/expected_could_show.hpp"

#include <doctest/doctest.h>

#include <cmath>

#include "engine/numbers/distributions.hpp"
#include "engine/rates/expected_ratio.hpp"
#include "engine/refusal.hpp"

namespace countsel {
namespace {

// The chance under `mean` of a count that the test shows on that side of what was expected.
double power(double expected, double mean, TestMethod test, double level, Direction direction, bool above) {
  double sum = 0;
  const double most = mean + expected + 20 * std::sqrt(mean + expected) + 50;
  for (double count = 0; count < most; ++count) {
    if ((count > expected) != above) continue;
    if (expected_test(count, expected, test, direction) < level) sum += poisson_exactly(count, mean);
  }
  return sum;
}

TEST_CASE("the ratios named are shown 8 times in 10") {
  for (const auto test : {TestMethod::exact, TestMethod::mid_p, TestMethod::score, TestMethod::likelihood}) {
    for (const double expected : {0.3, 2.5, 7.0, 40.25, 317.5}) {
      for (const double confidence : {0.9, 0.95, 0.999}) {
        for (const auto direction : {Direction::either, Direction::above, Direction::below}) {
          CAPTURE(static_cast<int>(test));
          CAPTURE(expected);
          CAPTURE(confidence);
          const auto could = expected_could_show(expected, test, confidence, direction);
          const double level = 1 - confidence;
          CHECK(std::isnan(could.above) == (direction == Direction::below));
          if (!std::isnan(could.above)) {
            CHECK(power(expected, could.above * expected, test, level, direction, true) ==
                  doctest::Approx(0.8).epsilon(1e-9));
          }
          if (direction == Direction::above) {
            CHECK(std::isnan(could.below));
          } else if (std::isnan(could.below)) {
            CHECK(expected_test(0, expected, test, direction) >= level);
          } else {
            CHECK(power(expected, could.below * expected, test, level, direction, false) ==
                  doctest::Approx(0.8).epsilon(1e-9));
          }
        }
      }
    }
  }
}

TEST_CASE("large numbers, nothing expected, and what cannot be tested") {
  const auto large = expected_could_show(1e9, TestMethod::exact, 0.95, Direction::either);
  CHECK(large.above == doctest::Approx(1 + (1.959964 + 0.841621) / std::sqrt(1e9)).epsilon(1e-8));
  CHECK(large.below == doctest::Approx(1 - (1.959964 + 0.841621) / std::sqrt(1e9)).epsilon(1e-8));
  const auto nothing = expected_could_show(0, TestMethod::exact, 0.95, Direction::either);
  CHECK(std::isnan(nothing.above));
  CHECK(std::isnan(nothing.below));
  CHECK_THROWS_AS(expected_could_show(3, TestMethod::e_test, 0.95, Direction::either), Refusal);
  CHECK_THROWS_AS(expected_could_show(3, TestMethod::exact, 1, Direction::either), Refusal);
}

}  // namespace
}  // namespace countsel
