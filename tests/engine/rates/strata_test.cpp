// tests/engine/rates/strata_test.cpp -- the stratified comparison: published, in 50 digits, and its rules.
#include "engine/rates/strata.hpp"

#include <doctest/doctest.h>

#include <initializer_list>

#include "engine/refusal.hpp"
#include "reference_rows.hpp"

namespace countsel {
namespace {

std::vector<TwoRates> strata_of(const ReferenceRow& row) {
  std::vector<TwoRates> strata;
  for (std::size_t i = 0; i < row.list("count1").size(); ++i)
    strata.push_back(
        {row.list("count1")[i], row.list("exposure1")[i], row.list("count0")[i], row.list("exposure0")[i]});
  return strata;
}

TEST_CASE("Mantel-Haenszel: published values") {
  for (const auto& row : reference_rows("comparisons_published.tsv", "mh")) {
    const auto strata = strata_of(row);
    const auto mh = mantel_haenszel(strata, 0.95);
    row.check("mh_ratio", mh.ratio);
    row.check("mh_difference", mh.difference);
    row.check("low", mh.ratio_low);
    row.check("high", mh.ratio_high);
    row.check("statistic", mh.statistic);
    const auto all = within_strata(strata, {});
    row.check("crude", all.crude);
    row.check("ml_ratio", common_ratio(strata, RatioMethod::likelihood, 0.95).ratio);
    for (std::size_t i = 0; i < strata.size(); ++i)
      row.check("ratios", all.strata[i].estimate, row.expected.count("ratios") != 0 ? i : 0);
  }
}

TEST_CASE("Mantel-Haenszel by its formulas in 50 digits") {
  for (const auto& row : reference_rows("strata.tsv", "mh")) {
    const auto mh = mantel_haenszel(strata_of(row), row.in("confidence"));
    row.check("mh_ratio", mh.ratio);
    row.check("log_variance", mh.log_variance);
    row.check("difference", mh.difference);
    row.check("difference_variance", mh.difference_variance);
    row.check("statistic", mh.statistic);
    row.check("p", mh.p_value);
  }
}

TEST_CASE("the common ratio by convolution in 50 digits") {
  for (const auto& row : reference_rows("strata.tsv", "exact")) {
    const auto strata = strata_of(row);
    const auto exact = common_ratio(strata, RatioMethod::exact, row.in("confidence"));
    row.check("ratio", exact.ratio);
    row.check("exact_low", exact.low);
    row.check("exact_high", exact.high);
    row.check("exact_p", exact.p_value);
    row.check("exact_above",
              common_ratio(strata, RatioMethod::exact, 0.95, Side::both, Direction::above).p_value);
    row.check("exact_below",
              common_ratio(strata, RatioMethod::exact, 0.95, Side::both, Direction::below).p_value);
    const auto mid_p = common_ratio(strata, RatioMethod::mid_p, row.in("confidence"));
    row.check("mid_p_low", mid_p.low);
    row.check("mid_p_high", mid_p.high);
    row.check("mid_p_p", mid_p.p_value);
    const auto likelihood = common_ratio(strata, RatioMethod::likelihood, row.in("confidence"));
    row.check("likelihood_low", likelihood.low);
    row.check("likelihood_high", likelihood.high);
  }
}

TEST_CASE("maximum likelihood and homogeneity equal a Poisson regression's") {
  for (const auto& row : reference_rows("strata.tsv", "glm")) {
    const auto strata = strata_of(row);
    row.check("ratio", common_ratio(strata, RatioMethod::likelihood, 0.95).ratio);
    row.check("homogeneity", ratio_homogeneity(strata).statistic);
    row.check("df", ratio_homogeneity(strata).df);
  }
}

TEST_CASE("the common difference by profile likelihood") {
  for (const auto& row : reference_rows("strata.tsv", "difference")) {
    const auto strata = strata_of(row);
    const auto common = common_difference(strata, row.in("confidence"));
    row.check("difference", common.difference);
    row.check("low", common.low);
    row.check("high", common.high);
    row.check("p", common.p_value);
    row.check("homogeneity", difference_homogeneity(strata).statistic);
  }
}

TEST_CASE("one stratum gives the two-group answers, up to a billion events") {
  for (const TwoRates& two : {TwoRates{14, 2300, 5, 2100}, TwoRates{0, 10, 4, 9}, TwoRates{3, 10, 0, 9},
                              TwoRates{90000, 4, 100300, 5}, TwoRates{4e8, 3, 6e8, 5}}) {
    const std::vector<TwoRates> strata = {two};
    for (const auto side : {Side::both, Side::lower, Side::upper}) {
      for (const auto& [method, test] : {std::pair{RatioMethod::exact, TestMethod::exact},
                                         std::pair{RatioMethod::mid_p, TestMethod::mid_p},
                                         std::pair{RatioMethod::likelihood, TestMethod::likelihood}}) {
        CAPTURE(two.count1);
        CAPTURE(static_cast<int>(side));
        const auto common = common_ratio(strata, method, 0.9, side, Direction::below, 1.1);
        const Limits limits = ratio_limits(two, method, 0.9, side);
        CHECK(common.low == doctest::Approx(limits.low).epsilon(1e-11));
        if (std::isinf(limits.high))
          CHECK(std::isinf(common.high));
        else
          CHECK(common.high == doctest::Approx(limits.high).epsilon(1e-11));
        CHECK(common.p_value == doctest::Approx(ratio_test(two, test, Direction::below, 1.1)).epsilon(1e-9));
      }
    }
    const auto difference = common_difference(strata, 0.9);
    const Limits limits = difference_limits(two, RatioMethod::likelihood, 0.9, Side::both);
    CHECK(difference.low == doctest::Approx(limits.low).epsilon(1e-8));
    CHECK(difference.high == doctest::Approx(limits.high).epsilon(1e-8));
    CHECK(difference.p_value ==
          doctest::Approx(difference_test(two, RatioMethod::likelihood, Direction::either)).epsilon(1e-7));
    const auto mh = mantel_haenszel(strata, 0.9);
    CHECK(mh.p_value == doctest::Approx(ratio_test(two, TestMethod::score, Direction::either)).epsilon(1e-9));
  }
}

TEST_CASE("limits and tests of a common ratio agree over a grid") {
  const std::vector<std::vector<TwoRates>> examples = {{{3, 10, 1, 20}, {5, 8, 2, 9}},
                                                       {{0, 10, 1, 20}, {1, 8, 2, 9}, {0, 3, 0, 2}},
                                                       {{400, 10, 300, 9}, {90, 4, 70, 2}}};
  for (const auto& strata : examples) {
    for (const auto method : {RatioMethod::exact, RatioMethod::mid_p, RatioMethod::likelihood}) {
      for (const double confidence : {0.1, 0.8, 0.95, 0.999}) {
        const auto common = common_ratio(strata, method, confidence);
        const double tail = (1 - confidence) / 2;
        const auto p = [&](double ratio, Direction direction) {
          return common_ratio(strata, method, confidence, Side::both, direction, ratio).p_value;
        };
        CAPTURE(confidence);
        CHECK(p(common.low, Direction::above) == doctest::Approx(tail).epsilon(1e-9));
        CHECK(p(common.high, Direction::below) == doctest::Approx(tail).epsilon(1e-9));
      }
    }
    const auto difference = common_difference(strata, 0.95);
    // The p-value of no difference turns where the limits touch 0.
    CHECK((difference.p_value < 0.05) == (difference.low > 0 || difference.high < 0));
  }
}

TEST_CASE("swapping the groups inverts; thin strata split from one leave Mantel-Haenszel alone") {
  const std::vector<TwoRates> strata = {{3, 10, 1, 20}, {5, 8, 2, 9}, {0, 2, 4, 5}};
  std::vector<TwoRates> turned;
  for (const auto& s : strata) turned.push_back({s.count0, s.exposure0, s.count1, s.exposure1});
  const auto a = mantel_haenszel(strata, 0.95), b = mantel_haenszel(turned, 0.95);
  CHECK(a.ratio == doctest::Approx(1 / b.ratio).epsilon(1e-13));
  CHECK(a.ratio_low == doctest::Approx(1 / b.ratio_high).epsilon(1e-13));
  CHECK(a.difference_low == doctest::Approx(-b.difference_high).epsilon(1e-13));
  CHECK(a.statistic == doctest::Approx(b.statistic).epsilon(1e-13));
  for (const auto method : {RatioMethod::exact, RatioMethod::mid_p, RatioMethod::likelihood}) {
    const auto c = common_ratio(strata, method, 0.95), d = common_ratio(turned, method, 0.95);
    CHECK(c.ratio == doctest::Approx(1 / d.ratio).epsilon(1e-12));
    CHECK(c.low == doctest::Approx(1 / d.high).epsilon(1e-11));
  }
  CHECK(common_difference(strata, 0.95).low ==
        doctest::Approx(-common_difference(turned, 0.95).high).epsilon(1e-9));
  CHECK(ratio_homogeneity(strata).statistic ==
        doctest::Approx(ratio_homogeneity(turned).statistic).epsilon(1e-12));
}

TEST_CASE("strata with nothing to say change nothing and are seen in the table") {
  const std::vector<TwoRates> plain = {{3, 10, 1, 20}, {5, 8, 2, 9}};
  const std::vector<TwoRates> more = {{3, 10, 1, 20}, {0, 6, 0, 7}, {4, 3, 0, 0}, {5, 8, 2, 9}, {0, 0, 2, 5}};
  StrataSpec spec;
  spec.method = StrataMethod::exact;
  const auto a = within_strata(plain, spec), b = within_strata(more, spec);
  CHECK(b.estimate == doctest::Approx(a.estimate).epsilon(1e-13));
  CHECK(b.low == doctest::Approx(a.low).epsilon(1e-13));
  CHECK(b.high == doctest::Approx(a.high).epsilon(1e-13));
  CHECK(b.p_value == doctest::Approx(a.p_value).epsilon(1e-13));
  CHECK(b.homogeneity.df == 1);
  CHECK(std::isnan(b.strata[2].estimate));
  CHECK(b.strata[2].weight == 0);
  CHECK(std::isnan(b.strata[1].estimate));
  CHECK(b.strata[1].low == 0);
  CHECK(b.crude == doctest::Approx((12.0 / 27) / (5.0 / 41)));
  CHECK(b.strata[0].weight + b.strata[3].weight == doctest::Approx(1));
}

TEST_CASE("zeros everywhere") {
  const std::vector<TwoRates> none = {{0, 10, 0, 20}, {0, 8, 0, 9}};
  const auto mh = mantel_haenszel(none, 0.95);
  CHECK(std::isnan(mh.ratio));
  CHECK(std::isnan(mh.ratio_low));
  CHECK(mh.difference == 0);
  CHECK(mh.statistic == 0);
  CHECK(mh.p_value == 1);
  const auto exact = common_ratio(none, RatioMethod::exact, 0.95);
  CHECK(std::isnan(exact.ratio));
  CHECK(exact.low == 0);
  CHECK(std::isinf(exact.high));
  CHECK(exact.p_value == 1);
  const auto difference = common_difference(none, 0.95);
  CHECK(difference.difference == 0);
  CHECK(difference.low < 0);
  CHECK(difference.high > 0);
  CHECK(difference.p_value == doctest::Approx(1));
  CHECK(std::isnan(ratio_homogeneity(none).p_value));
  // Nobody has both sides.
  const std::vector<TwoRates> apart = {{3, 10, 0, 0}, {0, 0, 5, 9}};
  CHECK(std::isnan(mantel_haenszel(apart, 0.95).statistic));
  CHECK(std::isnan(common_difference(apart, 0.95).difference));
  CHECK(std::isnan(common_ratio(apart, RatioMethod::exact, 0.95).ratio));
  // All events on one side.
  const std::vector<TwoRates> one_sided = {{3, 10, 0, 20}, {5, 8, 0, 9}};
  const auto infinite = mantel_haenszel(one_sided, 0.95);
  CHECK(std::isinf(infinite.ratio));
  CHECK(std::isnan(infinite.ratio_low));
  CHECK(infinite.p_value < 0.01);
  CHECK(ratio_homogeneity(one_sided).statistic == 0);
}

TEST_CASE("measures, refusals and strata that disagree") {
  StrataSpec spec;
  spec.measure = Measure::difference;
  const std::vector<TwoRates> cross = {{40, 100, 10, 100}, {10, 100, 45, 100}};
  const auto by_difference = within_strata(cross, spec);
  CHECK(by_difference.estimate == doctest::Approx((0.3 - 0.35) / 2));
  CHECK(by_difference.crude == doctest::Approx(-0.025));
  CHECK(by_difference.directions_differ);
  CHECK(by_difference.homogeneity.p_value < 1e-6);
  spec.method = StrataMethod::likelihood;
  CHECK(within_strata(cross, spec).low < by_difference.estimate);
  spec.method = StrataMethod::exact;
  CHECK_THROWS_AS(within_strata(cross, spec), Refusal);
  CHECK_THROWS_AS(within_strata({}, {}), Refusal);
  CHECK_THROWS_AS(mantel_haenszel(std::vector<TwoRates>{{1, 0, 1, 3}}, 0.95), Refusal);
  CHECK_THROWS_AS(mantel_haenszel(std::vector<TwoRates>{{1.5, 1, 1, 3}}, 0.95), Refusal);
  CHECK_THROWS_AS(mantel_haenszel(cross, 1), Refusal);
  CHECK_THROWS_AS(common_ratio(cross, RatioMethod::score, 0.95), Refusal);
  const std::vector<TwoRates> same = {{40, 100, 10, 100}, {10, 100, 5, 100}};
  CHECK(!within_strata(same, {}).directions_differ);
}

}  // namespace
}  // namespace countsel
