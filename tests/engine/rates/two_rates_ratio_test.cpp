// tests/engine/rates/two_rates_ratio_test.cpp -- ratio limits and tests, posterior, scaled spread.
#include <doctest/doctest.h>

#include <string>

#include "engine/numbers/distributions.hpp"
#include "engine/rates/two_rates.hpp"
#include "engine/refusal.hpp"
#include "reference_rows.hpp"

namespace countsel {
namespace {

constexpr double infinity = std::numeric_limits<double>::infinity();
constexpr double nan = std::numeric_limits<double>::quiet_NaN();

const std::map<std::string, RatioMethod> limit_methods = {{"exact", RatioMethod::exact},
                                                          {"mid_p", RatioMethod::mid_p},
                                                          {"score", RatioMethod::score},
                                                          {"likelihood", RatioMethod::likelihood},
                                                          {"log_wald", RatioMethod::log_wald}};
const std::map<std::string, TestMethod> test_methods = {{"exact", TestMethod::exact},
                                                        {"mid_p", TestMethod::mid_p},
                                                        {"score", TestMethod::score},
                                                        {"likelihood", TestMethod::likelihood}};

TwoRates pair_of(const ReferenceRow& row) {
  return {row.in("count1"), row.in("exposure1"), row.in("count0"), row.in("exposure0")};
}

double optional(const ReferenceRow& row, const std::string& key, double otherwise) {
  return row.inputs.contains(key) ? row.in(key) : otherwise;
}

const std::vector<TwoRates> grid = [] {
  std::vector<TwoRates> all;
  for (const double x1 : {0., 1., 2., 5., 17., 130., 6000.})
    for (const double x0 : {0., 1., 3., 9., 88., 700.}) all.push_back({x1, 12.5, x0, 31});
  return all;
}();

TEST_CASE("ratio limits agree with 30-digit arithmetic to 12 digits") {
  for (const auto& entry : limit_methods) {
    const auto& name = entry.first;
    const auto& method = entry.second;
    for (const auto& row : reference_rows("two_rates.tsv", "ratio_limits " + name + "\t")) {
      const Limits limits = ratio_limits(pair_of(row), method, row.in("confidence"), Side::both);
      row.check("low", limits.low);
      row.check("high", limits.high);
    }
  }
}

TEST_CASE("ratio tests agree with 30-digit arithmetic to 12 digits, tails to 1e-300") {
  for (const auto& entry : test_methods) {
    const auto& name = entry.first;
    const auto& method = entry.second;
    for (const auto& row : reference_rows("two_rates.tsv", "ratio_test " + name + "\t")) {
      const auto p = [&](Direction direction) {
        return ratio_test(pair_of(row), method, direction, row.in("null_ratio"));
      };
      row.check("above", p(Direction::above));
      row.check("below", p(Direction::below));
      row.check("either", p(Direction::either));
    }
  }
  for (const auto& row : reference_rows("two_rates.tsv", "posterior_higher\t"))
    row.check("chance", posterior_higher(pair_of(row)));
}

TEST_CASE("published ratio limits and tests") {
  for (const std::string name : {"exact", "score", "log_wald"})
    for (const auto& row : reference_rows("published_two_rates.tsv", "limits " + name + " ")) {
      const TwoRates data = pair_of(row);
      const Limits limits = ratio_limits(data, limit_methods.at(name), row.in("confidence"), Side::both);
      row.check("ratio", data.count1 / data.exposure1 / (data.count0 / data.exposure0));
      row.check("low", limits.low);
      row.check("high", limits.high);
    }
  for (const std::string name : {"exact", "mid_p", "score"})
    for (const auto& entry :
         {std::pair{" above ", Direction::above}, std::pair{" below ", Direction::below}}) {
      const auto& word = entry.first;
      const auto& direction = entry.second;
      if (name == "score" && direction == Direction::below) continue;  // none published
      for (const auto& row : reference_rows("published_two_rates.tsv", name + word))
        row.check("p",
                  ratio_test(pair_of(row), test_methods.at(name), direction, optional(row, "null_ratio", 1)));
    }
  for (const auto& row : reference_rows("published_two_rates.tsv", "exact either "))
    row.check("p", ratio_test(pair_of(row), TestMethod::exact, Direction::either));
}

TEST_CASE("changing the groups' places turns ratio limits over") {
  for (const TwoRates& d : grid)
    for (const auto& entry : limit_methods) {
      const auto& name = entry.first;
      const auto& method = entry.second;
      CAPTURE(name);
      const Limits limits = ratio_limits(d, method, 0.9, Side::both);
      const Limits turned =
          ratio_limits({d.count0, d.exposure0, d.count1, d.exposure1}, method, 0.9, Side::both);
      if (std::isnan(limits.low)) {
        CHECK(std::isnan(turned.high));
        continue;
      }
      CHECK(limits.low == doctest::Approx(1 / turned.high).epsilon(1e-13));
      CHECK(1 / limits.high == doctest::Approx(turned.low).epsilon(1e-13));
    }
}

TEST_CASE("ratio limits and tests do not heed the unit of exposure") {
  for (const TwoRates& d : grid)
    for (const auto& entry : limit_methods) {
      const auto& method = entry.second;
      const TwoRates scaled{d.count1, d.exposure1 * 1024, d.count0, d.exposure0 * 1024};
      const Limits a = ratio_limits(d, method, 0.95, Side::both),
                   b = ratio_limits(scaled, method, 0.95, Side::both);
      if (!std::isnan(a.low)) CHECK(a.low == b.low);
      if (!std::isnan(a.high)) CHECK(a.high == b.high);
    }
  CHECK(ratio_limits({3, 1e-300, 4, 1e-300}, RatioMethod::exact, 0.95, Side::both).high ==
        doctest::Approx(ratio_limits({3, 1, 4, 1}, RatioMethod::exact, 0.95, Side::both).high));
  CHECK(ratio_limits({3, 1e-200, 4, 1e200}, RatioMethod::exact, 0.95, Side::both).high == infinity);
}

TEST_CASE("a ratio limit is the ratio whose one-sided test gives the tail") {
  for (const TwoRates& d : grid)
    for (const auto& entry : test_methods) {
      const auto& name = entry.first;
      const auto& test = entry.second;
      CAPTURE(name);
      CAPTURE(d.count1);
      CAPTURE(d.count0);
      if (d.count1 + d.count0 == 0) continue;
      const Limits limits = ratio_limits(d, limit_methods.at(name), 0.95, Side::both);
      if (limits.low > 0)
        CHECK(ratio_test(d, test, Direction::above, limits.low) == doctest::Approx(0.025).epsilon(1e-10));
      if (std::isfinite(limits.high))
        CHECK(ratio_test(d, test, Direction::below, limits.high) == doctest::Approx(0.025).epsilon(1e-10));
      const bool holds_one = limits.low <= 1 && 1 <= limits.high;
      CHECK((ratio_test(d, test, Direction::either) >= 0.05) == holds_one);
    }
}

TEST_CASE("zero counts give one-sided limits") {
  for (const auto& entry : limit_methods) {
    const auto& name = entry.first;
    const auto& method = entry.second;
    if (method == RatioMethod::log_wald) continue;
    CAPTURE(name);
    const Limits none1 = ratio_limits({0, 10, 4, 10}, method, 0.95, Side::both);
    CHECK(none1.low == 0);
    CHECK((none1.high > 0 && none1.high < 2));
    const Limits none0 = ratio_limits({4, 10, 0, 10}, method, 0.95, Side::both);
    CHECK(none0.high == infinity);
    CHECK((none0.low > 0.3 && none0.low < 4));
    const Limits none = ratio_limits({0, 10, 0, 10}, method, 0.95, Side::both);
    CHECK(none.low == 0);
    CHECK(none.high == infinity);
  }
  for (const auto& entry : test_methods) {
    const auto& test = entry.second;
    for (const Direction direction : {Direction::either, Direction::above, Direction::below})
      CHECK(ratio_test({0, 3, 0, 5}, test, direction) == 1);
  }
  CHECK(ratio_test({0, 3, 0, 5}, TestMethod::e_test, Direction::either) == 1);
  CHECK(std::isnan(ratio_limits({0, 10, 4, 10}, RatioMethod::log_wald, 0.95, Side::both).low));
}

TEST_CASE("one-sided ratio limits leave the other end open") {
  const TwoRates d{14, 2300, 5, 2100};
  for (const auto& entry : limit_methods) {
    const auto& method = entry.second;
    const Limits both = ratio_limits(d, method, 0.9, Side::both);
    const Limits lower = ratio_limits(d, method, 0.95, Side::lower),
                 upper = ratio_limits(d, method, 0.95, Side::upper);
    CHECK(lower.low == doctest::Approx(both.low).epsilon(1e-11));
    CHECK(lower.high == infinity);
    CHECK(upper.high == doctest::Approx(both.high).epsilon(1e-11));
    CHECK(upper.low == 0);
    if (method != RatioMethod::log_wald) {  // a confidence below a half: the limit lies beyond the estimate
      CHECK(ratio_limits(d, method, 0.1, Side::lower).low > 14. / 2300 / (5. / 2100));
      CHECK(ratio_limits(d, method, 0.1, Side::upper).high < 14. / 2300 / (5. / 2100));
    }
  }
}

TEST_CASE("not worse than a margin is the one-sided test at the margin") {
  // 20 in 1000 against 22 in 1000: not worse than 2 times is shown, not worse than 1.2 times is not.
  const TwoRates d{20, 1000, 22, 1000};
  CHECK(ratio_test(d, TestMethod::exact, Direction::below, 2) < 0.025);
  CHECK(ratio_test(d, TestMethod::exact, Direction::below, 1.2) > 0.025);
  CHECK(ratio_test(d, TestMethod::exact, Direction::below, 2) ==
        doctest::Approx(binomial_at_most(20, 42, 2. / 3)).epsilon(1e-12));
}

TEST_CASE("the posterior chance is symmetric and follows the data") {
  CHECK(posterior_higher({7, 3, 7, 3}) == doctest::Approx(0.5).epsilon(1e-14));
  CHECK(posterior_higher({0, 3, 0, 3}) == doctest::Approx(0.5).epsilon(1e-14));
  CHECK(posterior_higher({0, 1, 0, 3}) == doctest::Approx(2 / 3.14159265358979 * std::acos(std::sqrt(0.25))));
  for (const TwoRates& d : grid)
    CHECK(posterior_higher(d) + posterior_higher({d.count0, d.exposure0, d.count1, d.exposure1}) ==
          doctest::Approx(1).epsilon(1e-13));
}

TEST_CASE("scaled limits agree with their test and reduce to log-Wald") {
  const TwoRates d{140, 2300, 50, 2100};
  const Limits limits = scaled_ratio_limits(d, 2.3, 17, 0.95, Side::both);
  CHECK(scaled_ratio_test(d, 2.3, 17, Direction::above, limits.low) == doctest::Approx(0.025).epsilon(1e-10));
  CHECK(scaled_ratio_test(d, 2.3, 17, Direction::either, limits.high) ==
        doctest::Approx(0.05).epsilon(1e-10));
  const double error = std::sqrt(2.3 * (1. / 140 + 1. / 50)),
               log_ratio = std::log(140. / 2300 / (50. / 2100));
  CHECK(scaled_ratio_test(d, 2.3, 17, Direction::either) ==
        doctest::Approx(f_above(log_ratio * log_ratio / error / error, 1, 17)).epsilon(1e-11));
  const Limits plain = ratio_limits(d, RatioMethod::log_wald, 0.95, Side::both);
  const Limits sure = scaled_ratio_limits(d, 1, infinity, 0.95, Side::both);
  CHECK(sure.low == doctest::Approx(plain.low).epsilon(1e-14));
  CHECK(sure.high == doctest::Approx(plain.high).epsilon(1e-14));
  CHECK(std::isnan(scaled_ratio_limits({0, 1, 3, 1}, 2, 9, 0.95, Side::both).low));
  CHECK(std::isnan(scaled_ratio_test({4, 1, 3, 1}, nan, 9, Direction::either)));
  const Limits gap = scaled_difference_limits(d, 2.3, 17, 0.95, Side::both);
  CHECK(scaled_difference_test(d, 2.3, 17, Direction::above, gap.low) ==
        doctest::Approx(0.025).epsilon(1e-10));
  CHECK(scaled_difference_test(d, 2.3, 17, Direction::below, gap.high) ==
        doctest::Approx(0.025).epsilon(1e-10));
  CHECK(scaled_difference_limits(d, 2.3, 17, 0.95, Side::upper).low == -infinity);
}

TEST_CASE("what is no pair of rates is refused") {
  CHECK_THROWS_AS(ratio_limits({-1, 1, 2, 1}, RatioMethod::exact, 0.95, Side::both), Refusal);
  CHECK_THROWS_AS(ratio_limits({1, 0, 2, 1}, RatioMethod::exact, 0.95, Side::both), Refusal);
  CHECK_THROWS_AS(ratio_limits({1, 1, 2.5, 1}, RatioMethod::exact, 0.95, Side::both), Refusal);
  CHECK_THROWS_AS(ratio_limits({1, 1, 2, nan}, RatioMethod::exact, 0.95, Side::both), Refusal);
  CHECK_THROWS_AS(ratio_limits({1, 1, 2, 1}, RatioMethod::exact, 1, Side::both), Refusal);
  CHECK_THROWS_AS(ratio_test({1, 1, 2, 1}, TestMethod::exact, Direction::either, 0), Refusal);
  CHECK_THROWS_AS(ratio_test({1, 1, 2, 1}, TestMethod::exact, Direction::either, infinity), Refusal);
  CHECK_THROWS_AS(posterior_higher({1, 1, 2, -1}), Refusal);
}

}  // namespace
}  // namespace countsel
