// tests/engine/rates/many_rates_test.cpp -- several groups: chi-square, conditional, pairs.
#include "engine/rates/many_rates.hpp"

#include <doctest/doctest.h>

#include <initializer_list>

#include "engine/numbers/distributions.hpp"
#include "engine/refusal.hpp"
#include "reference_rows.hpp"

namespace countsel {
namespace {

TEST_CASE("chi-square tests of equal rates: published values") {
  for (const auto& row : reference_rows("comparisons_published.tsv", "many")) {
    const auto pearson = many_rates_test(row.list("count"), row.list("exposure"), Distance::pearson);
    const auto likelihood = many_rates_test(row.list("count"), row.list("exposure"), Distance::likelihood);
    row.check("pearson", pearson.statistic);
    row.check("pearson_p", pearson.p_value);
    row.check("likelihood", likelihood.statistic);
    row.check("likelihood_p", likelihood.p_value);
    row.check("df", pearson.df);
  }
}

TEST_CASE("the conditional test by enumeration equals a list of all outcomes in fractions") {
  for (const auto& row : reference_rows("many_rates.tsv", "conditional")) {
    for (const auto distance : {Distance::pearson, Distance::likelihood}) {
      ConditionalSpec spec;
      spec.distance = distance;
      const auto test = conditional_rates_test(row.list("count"), row.list("exposure"), spec, {});
      CHECK(test.by == ChanceBy::enumeration);
      CHECK(test.p_error == 0);
      row.check(distance == Distance::pearson ? "pearson" : "likelihood", test.p_value);
    }
  }
}

TEST_CASE("the simulated test agrees with enumeration within its stated error") {
  const std::vector<double> counts = {3, 0, 5, 9, 1}, exposures = {12, 8, 15, 20, 5};
  for (const auto distance : {Distance::pearson, Distance::likelihood}) {
    ConditionalSpec spec;
    spec.distance = distance;
    const auto exact = conditional_rates_test(counts, exposures, spec, {});
    spec.most_outcomes = 0;
    spec.draws = 99999;
    const auto drawn = conditional_rates_test(counts, exposures, spec, {});
    REQUIRE(exact.by == ChanceBy::enumeration);
    REQUIRE(drawn.by == ChanceBy::simulation);
    CHECK(drawn.p_error ==
          doctest::Approx(std::sqrt(exact.p_value * (1 - exact.p_value) / 99999)).epsilon(0.05));
    CHECK(std::abs(drawn.p_value - exact.p_value) < 4 * drawn.p_error);
  }
}

TEST_CASE("the simulated test does not depend on the hands and repeats itself") {
  const std::vector<double> counts = {300, 250, 280, 260}, exposures = {10, 9, 10, 9};
  ConditionalSpec spec;
  spec.draws = 2000;
  spec.most_outcomes = 0;
  const auto one = conditional_rates_test(counts, exposures, spec, {});
  Work backwards;
  backwards.workers.run = [](std::size_t tasks, const std::function<void(std::size_t)>& piece) {
    for (std::size_t i = tasks; i-- > 0;) piece(i);
  };
  CHECK(conditional_rates_test(counts, exposures, spec, backwards).p_value == one.p_value);
  spec.seed = 1;
  CHECK(conditional_rates_test(counts, exposures, spec, {}).p_value != one.p_value);
  // Near chi-square where counts are large.
  CHECK(std::abs(one.p_value - many_rates_test(counts, exposures, Distance::likelihood).p_value) <
        4 * one.p_error);
}

TEST_CASE("two groups: the conditional test is the binomial's, ordered by distance") {
  const std::vector<double> counts = {14, 5}, exposures = {2300, 2100};
  const auto test = conditional_rates_test(counts, exposures, {}, {});
  // At least as far out: 14 or more of 19, or so few that the likelihood ratio is no smaller.
  const double p = 2300.0 / 4400;
  double chance = 0;
  for (double k = 0; k <= 19; ++k) {
    const std::vector<double> other = {k, 19 - k};
    if (many_rates_test(other, exposures, Distance::likelihood).statistic >= test.statistic - 1e-9)
      chance += binomial_exactly(k, 19, p);
  }
  CHECK(test.p_value == doctest::Approx(chance).epsilon(1e-12));
}

TEST_CASE("few events among very many groups are enumerated without a deep walk") {
  std::vector<double> counts(900, 0), exposures(900, 1);
  counts[4] = 2;
  const auto test = conditional_rates_test(counts, exposures, {}, {});
  CHECK(test.by == ChanceBy::enumeration);
  CHECK(test.p_value == doctest::Approx(1.0 / 900).epsilon(1e-10));
}

TEST_CASE("zeros and refusals") {
  const std::vector<double> none = {0, 0, 0}, exposures = {1, 2, 3};
  const auto test = many_rates_test(none, exposures, Distance::likelihood);
  CHECK(test.statistic == 0);
  CHECK(test.df == 2);
  CHECK(test.p_value == 1);
  CHECK(conditional_rates_test(none, exposures, {}, {}).p_value == 1);
  const std::vector<double> some = {0, 5, 0};
  CHECK(many_rates_test(some, exposures, Distance::likelihood).statistic ==
        doctest::Approx(10 * std::log(3)));
  CHECK_THROWS_AS(many_rates_test(std::vector<double>{1}, std::vector<double>{1}, Distance::pearson),
                  Refusal);
  CHECK_THROWS_AS(many_rates_test(some, std::vector<double>{1, 0, 1}, Distance::pearson), Refusal);
  CHECK_THROWS_AS(many_rates_test(some, std::vector<double>{1, 1}, Distance::pearson), Refusal);
  CHECK_THROWS_AS(many_rates_test(std::vector<double>{0.5, 1}, std::vector<double>{1, 1}, Distance::pearson),
                  Refusal);
  ConditionalSpec spec;
  spec.draws = 0;
  CHECK_THROWS_AS(conditional_rates_test(some, exposures, spec, {}), Refusal);
}

TEST_CASE("splitting all exposure alike changes nothing; the order of groups does not matter") {
  const std::vector<double> counts = {7, 1, 12}, exposures = {3, 4, 5}, scaled = {3e6, 4e6, 5e6};
  const std::vector<double> turned = {12, 7, 1}, turned_exposures = {5, 3, 4};
  for (const auto distance : {Distance::pearson, Distance::likelihood}) {
    const double here = many_rates_test(counts, exposures, distance).statistic;
    CHECK(many_rates_test(counts, scaled, distance).statistic == doctest::Approx(here).epsilon(1e-13));
    CHECK(many_rates_test(turned, turned_exposures, distance).statistic ==
          doctest::Approx(here).epsilon(1e-13));
  }
}

TEST_CASE("pairs in order, with the two-group answers and the adjustment asked for") {
  const std::vector<double> counts = {7, 0, 12, 0}, exposures = {3, 4, 5, 1};
  PairSpec spec;
  const auto pairs = all_pairs(counts, exposures, spec, {});
  REQUIRE(pairs.size() == 6);
  CHECK(pairs[0].first == 0);
  CHECK(pairs[0].second == 1);
  CHECK(pairs[5].first == 2);
  CHECK(pairs[5].second == 3);
  std::vector<double> p;
  for (const auto& pair : pairs) {
    const TwoRates two{counts[pair.first], exposures[pair.first], counts[pair.second],
                       exposures[pair.second]};
    CHECK(pair.p_value == ratio_test(two, TestMethod::exact, Direction::either));
    const Limits limits = ratio_limits(two, RatioMethod::exact, 0.95, Side::both);
    CHECK(pair.low == limits.low);
    CHECK((pair.high == limits.high));
    p.push_back(pair.p_value);
  }
  const auto adjusted = adjust_p_values(p, Adjust::holm);
  for (std::size_t i = 0; i < 6; ++i) CHECK(pairs[i].p_adjusted == adjusted[i]);
  CHECK(std::isinf(pairs[0].ratio));
  CHECK(std::isnan(pairs[4].ratio));
  const auto against = pairs_against(counts, exposures, 2, spec, {});
  REQUIRE(against.size() == 3);
  CHECK(against[0].second == 2);
  CHECK(against[0].ratio == doctest::Approx(7.0 / 3 / (12.0 / 5)));
  CHECK(against[2].first == 3);
  CHECK_THROWS_AS(pairs_against(counts, exposures, 4, spec, {}), Refusal);
}

}  // namespace
}  // namespace countsel
