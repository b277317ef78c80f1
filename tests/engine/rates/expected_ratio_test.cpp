// tests/engine/rates/expected_ratio_test.cpp -- observed over expected, known and estimated.
#include "engine/rates/expected_ratio.hpp"

#include <doctest/doctest.h>

#include <initializer_list>

#include "engine/refusal.hpp"
#include "reference_rows.hpp"

namespace countsel {
namespace {

ExpectedSpec spec_of(RateMethod limits, TestMethod test, double confidence = 0.95) {
  ExpectedSpec spec;
  spec.limits.method = limits;
  spec.limits.confidence = confidence;
  spec.test = test;
  return spec;
}

TEST_CASE("published observed over expected ratios") {
  for (const auto& [prefix, method] :
       {std::pair{"exact", RateMethod::exact}, std::pair{"byar", RateMethod::byar},
        std::pair{"expected", RateMethod::exact}}) {
    for (const auto& row : reference_rows("comparisons_published.tsv", prefix)) {
      const auto r = count_over_expected(row.in("observed"), row.in("expected"),
                                         spec_of(method, TestMethod::exact, row.in("confidence")));
      row.check("ratio", r.ratio);
      row.check("low", r.low);
      row.check("high", r.high);
      row.check("p", r.p_value);
    }
  }
}

TEST_CASE("tests of a count against an expected number") {
  auto rows = reference_rows("expected_ratio.tsv", "test");
  for (const auto& row : reference_rows("comparisons_published.tsv", "test")) rows.push_back(row);
  for (const auto& row : rows) {
    const double count = row.in("observed"), mean = row.in("expected");
    const auto p = [&](TestMethod test, Direction direction = Direction::either) {
      return expected_test(count, mean, test, direction);
    };
    row.check("exact", p(TestMethod::exact));
    row.check("exact_above", p(TestMethod::exact, Direction::above));
    row.check("exact_below", p(TestMethod::exact, Direction::below));
    row.check("mid_p", p(TestMethod::mid_p));
    row.check("mid_p_above", p(TestMethod::mid_p, Direction::above));
    row.check("mid_p_below", p(TestMethod::mid_p, Direction::below));
    row.check("score", p(TestMethod::score));
    row.check("likelihood", p(TestMethod::likelihood));
    row.check("likelihood_above", p(TestMethod::likelihood, Direction::above));
    row.check("likelihood_below", p(TestMethod::likelihood, Direction::below));
  }
}

struct Pairing {
  RateMethod limits;
  TestMethod test;
};
constexpr Pairing pairings[] = {{RateMethod::exact, TestMethod::exact},
                                {RateMethod::mid_p, TestMethod::mid_p},
                                {RateMethod::score, TestMethod::score},
                                {RateMethod::likelihood, TestMethod::likelihood}};

TEST_CASE("limits and tests agree over a grid") {
  for (const auto [limits, test] : pairings) {
    for (const double count : {0.0, 1.0, 2.0, 7.0, 40.0, 1e4, 1e9}) {
      for (const double confidence : {0.5, 0.9, 0.99}) {
        CAPTURE(count);
        CAPTURE(confidence);
        const auto r = count_over_expected(count, 10, spec_of(limits, test, confidence));
        const double alpha = 1 - confidence;
        // At the limit itself the two-sided p-value is alpha.
        if (r.low > 0)
          CHECK(expected_test(count, 10 * r.low, test, Direction::either) ==
                doctest::Approx(alpha).epsilon(1e-8));
        CHECK(expected_test(count, 10 * r.high, test, Direction::either) ==
              doctest::Approx(alpha).epsilon(1e-8));
        ExpectedSpec one = spec_of(limits, test, confidence);
        one.limits.side = Side::lower;
        const auto lower = count_over_expected(count, 10, one);
        if (lower.low > 0)
          CHECK(expected_test(count, 10 * lower.low, test, Direction::above) ==
                doctest::Approx(alpha).epsilon(1e-8));
        CHECK(std::isinf(lower.high));
      }
    }
  }
}

TEST_CASE("an expected number with doubt of its own is a comparison of two rates") {
  const PresentAndPast row{14, 2300, 5, 2100};
  for (const auto [limits, test] : pairings) {
    const auto r = count_over_past(row, spec_of(limits, test));
    CHECK(r.expected == doctest::Approx(5.0 / 2100 * 2300));
    CHECK(r.ratio == doctest::Approx(14 / r.expected));
    CHECK(r.low < r.ratio);
    CHECK(r.high > r.ratio);
    // More doubt than a fixed expected number carries, and ever less of it as the past grows.
    const auto fixed = count_over_expected(14, r.expected, spec_of(limits, test));
    CHECK(r.low < fixed.low);
    CHECK(r.high > fixed.high);
    CHECK(r.p_value > fixed.p_value);
    const auto long_past = count_over_past({14, 2300, 5e7, 2.1e10}, spec_of(limits, test));
    CHECK(long_past.low == doctest::Approx(fixed.low).epsilon(1e-5));
    CHECK(long_past.high == doctest::Approx(fixed.high).epsilon(1e-5));
    CHECK(long_past.p_value == doctest::Approx(fixed.p_value).epsilon(1e-4));
  }
}

TEST_CASE("rows together: sums where the pasts are alike, weighted sums where they are not") {
  const std::vector<PresentAndPast> alike = {{3, 10, 8, 40}, {5, 20, 9, 80}, {0, 5, 2, 20}};
  const auto exact = spec_of(RateMethod::exact, TestMethod::exact);
  const auto together = counts_over_pasts(alike, exact);
  const auto sums = count_over_past({8, 35, 19, 140}, exact);
  CHECK(together.low == doctest::Approx(sums.low).epsilon(1e-12));
  CHECK(together.high == doctest::Approx(sums.high).epsilon(1e-12));
  CHECK(together.p_value == doctest::Approx(sums.p_value).epsilon(1e-12));
  // A shade of difference between the pasts takes the weighted way and lands in the same place.
  for (const auto [limits, test] : {pairings[0], pairings[1]}) {
    auto shaded = alike;
    shaded[1].past_exposure *= 1 + 1e-10;
    const auto near = counts_over_pasts(shaded, spec_of(limits, test));
    const auto same = count_over_past({8, 35, 19, 140}, spec_of(limits, test));
    CHECK(near.low == doctest::Approx(same.low).epsilon(1e-8));
    CHECK(near.high == doctest::Approx(same.high).epsilon(1e-8));
    CHECK(near.p_value == doctest::Approx(same.p_value).epsilon(1e-8));
  }
  const std::vector<PresentAndPast> unlike = {{3, 10, 8, 40}, {5, 20, 9, 20}};
  const auto weighted = counts_over_pasts(unlike, exact);
  CHECK(weighted.expected == doctest::Approx(2 + 9));
  CHECK_THROWS_AS(counts_over_pasts(unlike, spec_of(RateMethod::score, TestMethod::score)), Refusal);
}

TEST_CASE("zeros on either side") {
  const auto exact = spec_of(RateMethod::exact, TestMethod::exact);
  const auto none = count_over_expected(0, 0, exact);
  CHECK(std::isnan(none.ratio));
  CHECK(none.low == 0);
  CHECK(std::isinf(none.high));
  CHECK(none.p_value == 1);
  CHECK_THROWS_AS(count_over_expected(1, 0, exact), Refusal);
  CHECK_THROWS_AS(count_over_expected(1.5, 2, exact), Refusal);
  CHECK_THROWS_AS(count_over_expected(1, -2, exact), Refusal);
  CHECK_THROWS_AS(expected_test(1, 2, TestMethod::e_test, Direction::either), Refusal);
  CHECK_THROWS_AS(count_over_past({1, 1, 1, 1}, spec_of(RateMethod::byar, TestMethod::exact)), Refusal);
  CHECK_THROWS_AS(counts_over_pasts({}, exact), Refusal);
  const auto no_past = count_over_past({4, 10, 0, 10}, exact);
  CHECK(std::isinf(no_past.ratio));
  CHECK(no_past.low > 0);
  CHECK(std::isinf(no_past.high));
  CHECK(std::isnan(count_over_past({0, 10, 0, 10}, exact).ratio));
  const std::vector<PresentAndPast> empty_pasts = {{0, 10, 0, 40}, {0, 20, 0, 20}};
  const auto together = counts_over_pasts(empty_pasts, exact);
  CHECK(together.low == 0);
  CHECK(std::isinf(together.high));
  CHECK(together.p_value == 1);
}

}  // namespace
}  // namespace countsel
