// tests/engine/rates/two_rates_could_show_test.cpp -- the ratio that a test would have shown, by brute force.
#include <doctest/doctest.h>

#include <cmath>
#include <initializer_list>
#include <limits>

#include "engine/numbers/distributions.hpp"
#include "engine/rates/two_rates.hpp"

namespace countsel {
namespace {

constexpr TestMethod all_methods[] = {TestMethod::exact, TestMethod::mid_p, TestMethod::score,
                                      TestMethod::likelihood, TestMethod::e_test};

// The chance that the test rejects with the estimate on that side, pair by pair.
double power(const TwoRates& d, TestMethod method, double level, Direction direction, bool above,
             double ratio) {
  const double pooled = (d.count1 + d.count0) / (d.exposure1 + d.exposure0);
  const double mean1 = ratio * pooled * d.exposure1, mean0 = pooled * d.exposure0;
  double total = 0;
  for (double i = 0; i < mean1 + 9 * std::sqrt(mean1) + 12; ++i)
    for (double j = 0; j < mean0 + 9 * std::sqrt(mean0) + 12; ++j) {
      const bool right_side = above ? i * d.exposure0 > j * d.exposure1 : i * d.exposure0 < j * d.exposure1;
      const double chance = poisson_exactly(i, mean1) * poisson_exactly(j, mean0);
      if (!right_side || chance < 1e-14) continue;
      if (ratio_test({i, d.exposure1, j, d.exposure0}, method, direction) <= level) total += chance;
    }
  return total;
}

TEST_CASE("at the ratio given the test shows a difference 8 times in 10") {
  for (const TwoRates& d : {TwoRates{1, 1, 0, 1}, {3, 10, 5, 12}, {14, 2300, 15, 2100}, {9, 1, 30, 5}})
    for (const TestMethod method : all_methods)
      for (const Direction direction : {Direction::either, Direction::above, Direction::below}) {
        CAPTURE(d.count1);
        CAPTURE(static_cast<int>(method));
        CAPTURE(static_cast<int>(direction));
        const CouldShow shown = could_show(d, method, 0.9, direction);
        if (direction == Direction::below) {
          CHECK(std::isnan(shown.above));
        } else {
          CHECK(shown.above > 1);
          CHECK(power(d, method, 0.1, direction, true, shown.above) == doctest::Approx(0.8).epsilon(1e-9));
          CHECK(power(d, method, 0.1, direction, true, std::sqrt(shown.above)) < 0.8);
        }
        if (direction == Direction::above) {
          CHECK(std::isnan(shown.below));
        } else if (std::isnan(shown.below)) {
          CHECK(power(d, method, 0.1, direction, false, 0) < 0.8);
        } else {
          CHECK(shown.below < 1);
          CHECK(power(d, method, 0.1, direction, false, shown.below) == doctest::Approx(0.8).epsilon(1e-9));
        }
      }
}

TEST_CASE("bounds found by interpolation are the bounds") {
  const TwoRates d{210, 3, 330, 5};
  for (const TestMethod method : {TestMethod::exact, TestMethod::score}) {
    const CouldShow shown = could_show(d, method, 0.95, Direction::either);
    CHECK(power(d, method, 0.05, Direction::either, true, shown.above) == doctest::Approx(0.8).epsilon(1e-9));
    CHECK(power(d, method, 0.05, Direction::either, false, shown.below) ==
          doctest::Approx(0.8).epsilon(1e-9));
  }
}

TEST_CASE("at many events the ratios are those of the normal approximation") {
  // log ratio = (z at 0.975 + z at 0.8) standard errors, in group 1 of the ratio's own mean
  for (const double n : {4e4, 4e6, 4e9}) {
    const double error = std::sqrt(2 / n), z = 1.959963984540054 + 0.8416212335729143;
    for (const TestMethod method : all_methods) {
      const CouldShow shown = could_show({n, 1, n, 1}, method, 0.95, Direction::either);
      CHECK(std::log(shown.above) == doctest::Approx(z * error).epsilon(20 / std::sqrt(n) + 1e-3));
      CHECK(-std::log(shown.below) == doctest::Approx(z * error).epsilon(20 / std::sqrt(n) + 1e-3));
    }
  }
}

TEST_CASE("the continuum takes over without a step") {
  for (const bool first : {true, false}) {
    const double n = 1e6, exposure = first ? 1 : 3;
    const CouldShow under =
        could_show({n - 2000, 1, n * exposure, exposure}, TestMethod::exact, 0.95, Direction::either);
    const CouldShow over =
        could_show({n + 2000, 1, n * exposure, exposure}, TestMethod::exact, 0.95, Direction::either);
    CHECK((under.above - 1) / (over.above - 1) == doctest::Approx(1.001).epsilon(1.5e-3));
    CHECK((1 - under.below) / (1 - over.below) == doctest::Approx(1.001).epsilon(1.5e-3));
  }
}

TEST_CASE("far from even exposures: what cannot be shown is NaN, and nothing runs away") {
  // The E-test's far tail stays near a half when group 1 has next to no exposure.
  CHECK(std::isnan(could_show({5, 1e-300, 3, 1}, TestMethod::e_test, 0.95, Direction::either).above));
  for (const TestMethod method : all_methods)
    for (const double exposure : {1e-300, 1e-3, 1e3, 1e300})
      for (const double count : {0., 7., 9e15}) {
        const CouldShow shown = could_show({count, exposure, 3, 1}, method, 0.95, Direction::either);
        CHECK((std::isnan(shown.above) || shown.above >= 1));
        CHECK((std::isnan(shown.below) || shown.below <= 1));
      }
}

TEST_CASE("no events, and a level that is always reached") {
  const CouldShow none = could_show({0, 1, 0, 2}, TestMethod::exact, 0.95, Direction::either);
  CHECK(std::isnan(none.above));
  CHECK(std::isnan(none.below));
  const CouldShow lax = could_show({50, 1, 50, 1}, TestMethod::mid_p, 0.1, Direction::above);
  CHECK(lax.above == 1);
}

}  // namespace
}  // namespace countsel
