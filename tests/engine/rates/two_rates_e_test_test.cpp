// tests/engine/rates/two_rates_e_test_test.cpp -- the E-test against its authors' values and a plain double
// sum.
#include <doctest/doctest.h>

#include <cmath>

#include "engine/rates/two_rates_parts.hpp"
#include "reference_rows.hpp"

namespace countsel {
namespace {

TwoRates pair_of(const ReferenceRow& row) {
  return {row.in("count1"), row.in("exposure1"), row.in("count0"), row.in("exposure0")};
}

TEST_CASE("E-test: the authors' values with each group's own variance, and published score values") {
  for (const auto& entry : {std::pair{"either ", Direction::either}, std::pair{"above ", Direction::above},
                            std::pair{"below ", Direction::below}}) {
    const auto& word = entry.first;
    const auto& direction = entry.second;
    for (const auto& row : reference_rows("published_two_rates.tsv", std::string("unpooled ") + word))
      row.check("p", e_test(pair_of(row), ETestStatistic::unpooled, direction));
  }
  for (const auto& row : reference_rows("published_two_rates.tsv", "e_test either "))
    row.check("p", e_test(pair_of(row), ETestStatistic::score, Direction::either));
  for (const auto& row : reference_rows("published_two_rates.tsv", "e_test above "))
    row.check("p", e_test(pair_of(row), ETestStatistic::score, Direction::above));
  // The printed 0.000298 holds for both statistics.
  CHECK(ratio_test({60, 51477.5, 30, 54308.7}, TestMethod::e_test, Direction::above) ==
        doctest::Approx(0.000298).epsilon(0.0005 / 0.298));
}

TEST_CASE("E-test: the plain double sum in 45 digits") {
  for (const auto& entry :
       {std::pair{"score", ETestStatistic::score}, std::pair{"unpooled", ETestStatistic::unpooled}}) {
    const auto& name = entry.first;
    const auto& kind = entry.second;
    for (const auto& row : reference_rows("two_rates.tsv", std::string("e_test ") + name + "\t")) {
      const auto p = [&](Direction direction) {
        return e_test(pair_of(row), kind, direction, row.in("null_ratio"));
      };
      row.check("above", p(Direction::above));
      row.check("below", p(Direction::below));
      row.check("either", p(Direction::either));
    }
  }
}

TEST_CASE("E-test: where the sum stops, mid-p's tails given the sum take over without a step") {
  for (const double share : {0.5, 0.1, 0.93})
    for (const double z : {-5., 0.5, 2., 4.}) {
      const double n = 1.6e7, x1 = std::floor(n * share + z * std::sqrt(n * share * (1 - share)));
      const TwoRates d{x1, share, n - x1, 1 - share};
      for (const ETestStatistic kind : {ETestStatistic::score, ETestStatistic::unpooled}) {
        CAPTURE(share);
        CAPTURE(z);
        CHECK(e_test(d, kind, Direction::either) ==
              doctest::Approx(e_test_given_sum(x1, n - x1, share_under(d, 1), kind)).epsilon(1e-5));
        CHECK(e_test(d, kind, Direction::above) ==
              doctest::Approx(ratio_test(d, TestMethod::mid_p, Direction::above)).epsilon(1e-5));
      }
    }
  const TwoRates equal{1e9, 1, 1e9 + 2e5, 1};
  CHECK(ratio_test(equal, TestMethod::e_test, Direction::either) ==
        doctest::Approx(ratio_test(equal, TestMethod::mid_p, Direction::either)).epsilon(1e-12));
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
