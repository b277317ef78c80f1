// tests/engine/rates/two_rates_difference_test.cpp -- difference limits and tests.
#include <doctest/doctest.h>

#include <string>

#include "engine/rates/two_rates.hpp"
#include "reference_rows.hpp"

namespace countsel {
namespace {

constexpr double infinity = std::numeric_limits<double>::infinity();

const std::map<std::string, RatioMethod> methods = {
    {"score", RatioMethod::score}, {"likelihood", RatioMethod::likelihood}, {"wald", RatioMethod::log_wald}};

TwoRates pair_of(const ReferenceRow& row) {
  return {row.in("count1"), row.in("exposure1"), row.in("count0"), row.in("exposure0")};
}

TEST_CASE("difference limits and tests agree with 30-digit arithmetic") {
  for (const auto& entry : methods) {
    const auto& name = entry.first;
    const auto& method = entry.second;
    for (const auto& row : reference_rows("two_rates.tsv", "difference_limits " + name + "\t")) {
      const Limits limits = difference_limits(pair_of(row), method, row.in("confidence"), Side::both);
      row.check("low", limits.low);
      row.check("high", limits.high);
    }
    for (const auto& row : reference_rows("two_rates.tsv", "difference_test " + name + "\t")) {
      const auto p = [&](Direction direction) { return difference_test(pair_of(row), method, direction); };
      row.check("above", p(Direction::above));
      row.check("below", p(Direction::below));
      row.check("either", p(Direction::either));
    }
  }
}

TEST_CASE("published difference tests") {
  for (const std::string name : {"score", "wald"})
    for (const auto& row : reference_rows("published_two_rates.tsv", "difference " + name + " "))
      row.check("p",
                difference_test(pair_of(row), methods.at(name), Direction::above, row.in("null_difference")));
}

TEST_CASE("difference limits agree with their tests, turn with the groups and scale with the exposure") {
  for (const double x1 : {0., 1., 2., 5., 17., 130., 6000.})
    for (const double x0 : {0., 1., 3., 9., 88., 700.})
      for (const double e0 : {31., 0.02})
        for (const auto& entry : methods) {
          const auto& name = entry.first;
          const auto& method = entry.second;
          CAPTURE(name);
          CAPTURE(x1);
          CAPTURE(x0);
          CAPTURE(e0);
          const TwoRates d{x1, 12.5, x0, e0};
          const Limits limits = difference_limits(d, method, 0.95, Side::both);
          if (std::isnan(limits.low)) {
            CHECK((x1 + x0 == 0 && method == RatioMethod::log_wald));
            continue;
          }
          CHECK(limits.low < limits.high);
          CHECK(limits.low <= x1 / 12.5 - x0 / e0);
          CHECK(difference_test(d, method, Direction::above, limits.low) ==
                doctest::Approx(0.025).epsilon(1e-9));
          CHECK(difference_test(d, method, Direction::below, limits.high) ==
                doctest::Approx(0.025).epsilon(1e-9));
          const Limits turned = difference_limits({x0, e0, x1, 12.5}, method, 0.95, Side::both);
          CHECK(turned.low == doctest::Approx(-limits.high).epsilon(1e-12));
          CHECK(turned.high == doctest::Approx(-limits.low).epsilon(1e-12));
          const Limits scaled = difference_limits({x1, 12.5 * 64, x0, e0 * 64}, method, 0.95, Side::both);
          CHECK(scaled.low * 64 == doctest::Approx(limits.low).epsilon(1e-13));
          CHECK(scaled.high * 64 == doctest::Approx(limits.high).epsilon(1e-13));
        }
}

TEST_CASE("with no events the score limits are those of one rate") {
  const double z = 1.959963984540054;
  const Limits limits = difference_limits({0, 10, 0, 40}, RatioMethod::exact, 0.95, Side::both);
  CHECK(limits.high == doctest::Approx(z * z / 10).epsilon(1e-13));
  CHECK(limits.low == doctest::Approx(-z * z / 40).epsilon(1e-13));
  const Limits likelihood = difference_limits({0, 10, 0, 40}, RatioMethod::likelihood, 0.95, Side::both);
  CHECK(likelihood.high == doctest::Approx(z * z / 20).epsilon(1e-13));
  CHECK(difference_test({0, 10, 0, 40}, RatioMethod::exact, Direction::either) == 1);
  CHECK(std::isnan(difference_test({0, 10, 0, 40}, RatioMethod::log_wald, Direction::either)));
  CHECK(difference_limits({0, 10, 0, 40}, RatioMethod::exact, 0.95, Side::upper).low == -infinity);
  CHECK(difference_limits({0, 10, 0, 40}, RatioMethod::exact, 0.95, Side::lower).high == infinity);
}

TEST_CASE("the score test of difference 0 is the score test of ratio 1") {
  for (const double x1 : {0., 4., 1000., 1e9})
    for (const double x0 : {1., 7., 1003., 1e9 + 3e4}) {
      const TwoRates d{x1, 3, x0, 4};
      for (const Direction direction : {Direction::either, Direction::above, Direction::below})
        CHECK(difference_test(d, RatioMethod::score, direction) ==
              doctest::Approx(ratio_test(d, TestMethod::score, direction)).epsilon(1e-12));
    }
}

TEST_CASE("extreme exposures neither overflow nor vanish on the way") {
  const Limits near = difference_limits({3, 1, 5, 2}, RatioMethod::score, 0.95, Side::both);
  const Limits far =
      difference_limits({3, std::ldexp(1, 900), 5, std::ldexp(2, 900)}, RatioMethod::score, 0.95, Side::both);
  CHECK(std::ldexp(far.low, 900) == doctest::Approx(near.low).epsilon(1e-14));
  CHECK(std::ldexp(far.high, 900) == doctest::Approx(near.high).epsilon(1e-14));
  CHECK(difference_limits({3, 1e-308, 5, 1e-300}, RatioMethod::score, 0.95, Side::both).high == infinity);
}

}  // namespace
}  // namespace countsel
