// tests/engine/rates/trend_test.cpp -- climbs against published data, regressions and 50 digits.
#include "engine/rates/trend.hpp"

#include <doctest/doctest.h>

#include <initializer_list>

#include "engine/refusal.hpp"
#include "reference_rows.hpp"

namespace countsel {
namespace {

Trend climb_of(const ReferenceRow& row, TrendMethod method = TrendMethod::likelihood) {
  TrendSpec spec;
  spec.method = method;
  return climb(row.list("count"), row.list("exposure"), row.list("order"), spec);
}

TEST_CASE("trends: coal-mining disasters and doctors") {
  auto rows = reference_rows("comparisons_published.tsv", "trend");
  for (const auto& row : reference_rows("trend.tsv", "departure")) rows.push_back(row);
  for (const auto& row : rows) {
    const auto trend = climb_of(row);
    row.check("log_ratio", trend.log_ratio);
    row.check("log_error", trend.log_error);
    row.check("departure", trend.departure_statistic);
    row.check("signed_root", trend.signed_root);
    row.check("statistic", trend.statistic);
    CHECK(trend.departure_df == static_cast<double>(row.list("count").size()) - 2);
  }
}

TEST_CASE("slopes and limits in 50 digits") {
  for (const auto& row : reference_rows("trend.tsv", "slope")) {
    const auto likelihood = climb_of(row), wald = climb_of(row, TrendMethod::wald),
               score = climb_of(row, TrendMethod::score);
    row.check("log_ratio", likelihood.log_ratio);
    row.check("log_error", likelihood.log_error);
    row.check("signed_root", likelihood.signed_root);
    row.check("statistic", likelihood.statistic);
    row.check("p", likelihood.p_value);
    row.check("likelihood_low", likelihood.low);
    row.check("likelihood_high", likelihood.high);
    row.check("wald_low", wald.low);
    row.check("wald_high", wald.high);
    row.check("score_low", score.low);
    row.check("score_high", score.high);
  }
}

TEST_CASE("two steps are a comparison of two rates") {
  const std::vector<double> counts = {5, 14}, exposures = {2100, 2300}, order = {0, 1};
  TrendSpec spec;
  const TwoRates two{14, 2300, 5, 2100};
  const auto trend = climb(counts, exposures, order, spec);
  CHECK(std::exp(trend.log_ratio) == doctest::Approx(14.0 / 2300 / (5.0 / 2100)).epsilon(1e-12));
  CHECK(trend.p_value ==
        doctest::Approx(ratio_test(two, TestMethod::score, Direction::either)).epsilon(1e-10));
  Limits limits = ratio_limits(two, RatioMethod::likelihood, 0.95, Side::both);
  CHECK(std::exp(trend.low) == doctest::Approx(limits.low).epsilon(1e-10));
  CHECK(std::exp(trend.high) == doctest::Approx(limits.high).epsilon(1e-10));
  spec.method = TrendMethod::score;
  const auto score = climb(counts, exposures, order, spec);
  limits = ratio_limits(two, RatioMethod::score, 0.95, Side::both);
  CHECK(std::exp(score.low) == doctest::Approx(limits.low).epsilon(1e-10));
  CHECK(std::exp(score.high) == doctest::Approx(limits.high).epsilon(1e-10));
  CHECK(trend.departure_df == 0);
  CHECK(std::isnan(trend.departure_p));
}

TEST_CASE("score limits agree with the score test over a grid") {
  for (const auto& counts : {std::vector<double>{3, 5, 9, 4}, {0, 1, 0, 4}, {30, 20, 12, 11}}) {
    const std::vector<double> exposures = {2, 3, 2.5, 1}, order = {1, 2, 4, 5};
    for (const double confidence : {0.5, 0.8, 0.9, 0.95, 0.99, 0.999}) {
      TrendSpec spec;
      spec.method = TrendMethod::score;
      spec.confidence = confidence;
      const auto trend = climb(counts, exposures, order, spec);
      CHECK((trend.p_value < 1 - confidence) == (trend.low > 0 || trend.high < 0));
      spec.side = Side::lower;
      spec.direction = Direction::above;
      const auto above = climb(counts, exposures, order, spec);
      CHECK((above.p_value < 1 - confidence) == (above.low > 0));
      CHECK(std::isinf(above.high));
    }
  }
}

TEST_CASE("the fit keeps total and trend; units and direction of the order only rescale") {
  const std::vector<double> counts = {3, 5, 9, 4}, exposures = {2, 3, 2.5, 1}, order = {1, 2, 4, 5};
  const auto trend = climb(counts, exposures, order, {});
  double total = 0, weighted = 0, seen = 0;
  for (std::size_t i = 0; i < 4; ++i) {
    total += trend.fitted[i] * exposures[i];
    weighted += trend.fitted[i] * exposures[i] * order[i];
    seen += counts[i] * order[i];
  }
  CHECK(total == doctest::Approx(21).epsilon(1e-12));
  CHECK(weighted == doctest::Approx(seen).epsilon(1e-12));
  const auto years = climb(counts, exposures, std::vector<double>{1910, 1920, 1940, 1950}, {});
  CHECK(10 * years.log_ratio == doctest::Approx(trend.log_ratio).epsilon(1e-11));
  CHECK(10 * years.low == doctest::Approx(trend.low).epsilon(1e-10));
  CHECK(years.statistic == doctest::Approx(trend.statistic).epsilon(1e-11));
  const auto turned = climb(std::vector<double>{4, 9, 5, 3}, std::vector<double>{1, 2.5, 3, 2},
                            std::vector<double>{-5, -4, -2, -1}, {});
  CHECK(turned.log_ratio == doctest::Approx(-trend.log_ratio).epsilon(1e-11));
  CHECK(turned.low == doctest::Approx(-trend.high).epsilon(1e-10));
}

TEST_CASE("events at one end only, no events, huge counts") {
  const std::vector<double> exposures = {10, 10, 10}, order = {1, 2, 3};
  const auto last = climb(std::vector<double>{0, 0, 5}, exposures, order, {});
  CHECK(std::isinf(last.log_ratio));
  CHECK(last.log_ratio > 0);
  CHECK(std::isinf(last.high));
  CHECK(last.departure_statistic == 0);
  CHECK(last.fitted[2] == 0.5);
  const auto first = climb(std::vector<double>{5, 0, 0}, exposures, order, {});
  CHECK(first.log_ratio == -std::numeric_limits<double>::infinity());
  CHECK(first.high == doctest::Approx(-last.low).epsilon(1e-10));
  TrendSpec wald;
  wald.method = TrendMethod::wald;
  CHECK(std::isnan(climb(std::vector<double>{5, 0, 0}, exposures, order, wald).high));
  const auto middle = climb(std::vector<double>{0, 5, 0}, exposures, order, {});
  CHECK(middle.log_ratio == doctest::Approx(0));
  CHECK(middle.low == doctest::Approx(-middle.high));
  const auto none = climb(std::vector<double>{0, 0, 0}, exposures, order, {});
  CHECK(std::isnan(none.log_ratio));
  CHECK(none.p_value == 1);
  CHECK(std::isinf(none.low));
  const auto huge = climb(std::vector<double>{1e9, 1.1e9, 1.21e9}, exposures, order, {});
  CHECK(huge.log_ratio == doctest::Approx(std::log(1.1)).epsilon(1e-12));
  CHECK(huge.high - huge.log_ratio == doctest::Approx(1.959963984540054 * huge.log_error).epsilon(1e-4));
  CHECK(huge.departure_statistic < 1e-6);
}

TEST_CASE("what is refused") {
  const std::vector<double> counts = {1, 2, 3}, exposures = {1, 1, 1};
  CHECK_THROWS_AS(climb(counts, exposures, std::vector<double>{1, 1, 2}, {}), Refusal);
  CHECK_THROWS_AS(climb(counts, exposures, std::vector<double>{1, 2}, {}), Refusal);
  CHECK_THROWS_AS(climb(std::vector<double>{1}, std::vector<double>{1}, std::vector<double>{1}, {}), Refusal);
  CHECK_THROWS_AS(climb(counts, std::vector<double>{1, 0, 1}, std::vector<double>{1, 2, 3}, {}), Refusal);
}

}  // namespace
}  // namespace countsel
