// tests/engine/rates/two_rates_e_test_test.cpp -- the E-test against its authors' values and a plain double
// sum.
#include <doctest/doctest.h>

#include <cmath>

#include "engine/rates/two_rates.hpp"
#include "reference_rows.hpp"

namespace countsel {
namespace {

TwoRates pair_of(const ReferenceRow& row) {
  return {row.in("count1"), row.in("exposure1"), row.in("count0"), row.in("exposure0")};
}

TEST_CASE("E-test: the authors' values with each group's own variance, and published score values") {
  for (const auto& [word, direction] :
       {std::pair{"either ", Direction::either}, std::pair{"above ", Direction::above},
        std::pair{"below ", Direction::below}})
    for (const auto& row : reference_rows("published_two_rates.tsv", std::string("unpooled ") + word))
      row.check("p", e_test(pair_of(row), ETestStatistic::unpooled, direction));
  for (const auto& row : reference_rows("published_two_rates.tsv", "e_test either "))
    row.check("p", ratio_test(pair_of(row), TestMethod::e_test, Direction::either));
  for (const auto& row : reference_rows("published_two_rates.tsv", "e_test above "))
    row.check("p", ratio_test(pair_of(row), TestMethod::e_test, Direction::above));
}

TEST_CASE("E-test: the plain double sum in 45 digits") {
  for (const auto& [name, kind] :
       {std::pair{"score", ETestStatistic::score}, std::pair{"unpooled", ETestStatistic::unpooled}})
    for (const auto& row : reference_rows("two_rates.tsv", std::string("e_test ") + name + "\t")) {
      const auto p = [&](Direction direction) {
        return e_test(pair_of(row), kind, direction, row.in("null_ratio"));
      };
      row.check("above", p(Direction::above));
      row.check("below", p(Direction::below));
      row.check("either", p(Direction::either));
    }
}

TEST_CASE("E-test: where the sum stops, the conditional mid-p value takes over without a step") {
  for (const double z : {0.5, 2., 5.}) {
    const double n = 9e6, x1 = std::floor(n + z * std::sqrt(2 * n));
    const TwoRates d{x1, 1, n, 1};
    const double summed = ratio_test(d, TestMethod::e_test, Direction::above);
    CHECK(summed == doctest::Approx(ratio_test(d, TestMethod::mid_p, Direction::above)).epsilon(1e-5));
  }
  CHECK(ratio_test({1e9, 1, 1e9 + 2e5, 1}, TestMethod::e_test, Direction::either) ==
        ratio_test({1e9, 1, 1e9 + 2e5, 1}, TestMethod::mid_p, Direction::either));
}

TEST_CASE("E-test: far tails, and changing the groups' places") {
  const TwoRates far{900, 1, 100, 1};
  const double p = ratio_test(far, TestMethod::e_test, Direction::above);
  CHECK(std::log10(p) ==
        doctest::Approx(-160.6645).epsilon(1e-6));  // log-sum over 2500 x 2500 pairs in SciPy 1.10
  for (const double x1 : {0., 3., 40.})
    for (const double x0 : {1., 9.}) {
      const TwoRates d{x1, 2, x0, 5}, turned{x0, 5, x1, 2};
      CHECK(
          ratio_test(d, TestMethod::e_test, Direction::above, 1.5) ==
          doctest::Approx(ratio_test(turned, TestMethod::e_test, Direction::below, 1 / 1.5)).epsilon(1e-11));
      CHECK(ratio_test(d, TestMethod::e_test, Direction::either) ==
            doctest::Approx(ratio_test(turned, TestMethod::e_test, Direction::either)).epsilon(1e-11));
    }
}

}  // namespace
}  // namespace countsel
