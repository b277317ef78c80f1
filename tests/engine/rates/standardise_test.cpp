// tests/engine/rates/standardise_test.cpp -- direct and indirect standardisation.
#include "engine/rates/standardise.hpp"

#include <doctest/doctest.h>

#include <initializer_list>

#include "engine/refusal.hpp"
#include "reference_rows.hpp"

namespace countsel {
namespace {

StrataTable one_group(const std::vector<double>& counts, const std::vector<double>& exposures) {
  return {1, counts.size(), counts, exposures};
}

DirectSpec direct(DirectMethod method, double confidence = 0.95) {
  DirectSpec spec;
  spec.method = method;
  spec.confidence = confidence;
  return spec;
}

TEST_CASE("directly standardised rates per 100,000: published data") {
  for (const auto& row : reference_rows("comparisons_published.tsv", "direct")) {
    const auto table = one_group(row.list("count"), row.list("exposure"));
    const auto gamma = direct_rates(table, row.list("weight"), direct(DirectMethod::gamma)).at(0);
    const auto dobson = direct_rates(table, row.list("weight"), direct(DirectMethod::dobson)).at(0);
    row.check("crude", 1e5 * gamma.crude_rate);
    row.check("rate", 1e5 * gamma.rate);
    row.check("gamma_low", 1e5 * gamma.low);
    row.check("gamma_high", 1e5 * gamma.high);
    row.check("dobson_low", 1e5 * dobson.low);
    row.check("dobson_high", 1e5 * dobson.high);
  }
}

TEST_CASE("directly standardised rates against the gamma law in 50 digits") {
  for (const auto& row : reference_rows("standardise.tsv", "direct")) {
    const auto table = one_group(row.list("count"), row.list("exposure"));
    const auto rate = [&](DirectMethod method) {
      return direct_rates(table, row.list("weight"), direct(method)).at(0);
    };
    row.check("rate", rate(DirectMethod::gamma).rate);
    row.check("gamma_low", rate(DirectMethod::gamma).low);
    row.check("gamma_high", rate(DirectMethod::gamma).high);
    row.check("mid_p_low", rate(DirectMethod::mid_p).low);
    row.check("mid_p_high", rate(DirectMethod::mid_p).high);
    row.check("normal_low", rate(DirectMethod::normal).low);
    row.check("normal_high", rate(DirectMethod::normal).high);
  }
}

StrataTable two_groups(const ReferenceRow& row) {
  StrataTable table{2, row.list("count1").size(), row.list("count1"), row.list("exposure1")};
  table.counts.insert(table.counts.end(), row.list("count0").begin(), row.list("count0").end());
  table.exposures.insert(table.exposures.end(), row.list("exposure0").begin(), row.list("exposure0").end());
  return table;
}

TEST_CASE("ratios of directly standardised rates") {
  for (const auto& row : reference_rows("standardise.tsv", "ratio")) {
    for (const bool mid_p : {false, true}) {
      DirectSpec spec = direct(mid_p ? DirectMethod::mid_p : DirectMethod::gamma);
      spec.reference = 1;
      const auto rates = direct_rates(two_groups(row), row.list("weight"), spec);
      row.check("ratio", rates[0].ratio);
      row.check(mid_p ? "mid_p_low" : "gamma_low", rates[0].ratio_low);
      row.check(mid_p ? "mid_p_high" : "gamma_high", rates[0].ratio_high);
      CHECK(rates[1].ratio == 1);
      CHECK(std::isnan(rates[1].ratio_low));
    }
  }
}

TEST_CASE("all direct limits come close with many events") {
  const auto table = StrataTable{2, 2, {4000, 9000, 3000, 8000}, {100, 200, 110, 150}};
  DirectSpec spec = direct(DirectMethod::gamma);
  spec.reference = 0;
  const auto gamma = direct_rates(table, std::vector<double>{1, 1}, spec).at(1);
  for (const auto method : {DirectMethod::mid_p, DirectMethod::dobson, DirectMethod::normal}) {
    spec.method = method;
    const auto other = direct_rates(table, std::vector<double>{1, 1}, spec).at(1);
    CHECK(other.low == doctest::Approx(gamma.low).epsilon(1e-3));
    CHECK(other.high == doctest::Approx(gamma.high).epsilon(1e-3));
    CHECK(other.ratio_low == doctest::Approx(gamma.ratio_low).epsilon(1e-3));
    CHECK(other.ratio_high == doctest::Approx(gamma.ratio_high).epsilon(1e-3));
  }
}

TEST_CASE("weights by the group's own exposures give the crude rate; their scale does not matter") {
  const auto table = one_group({4, 0, 9}, {10, 20, 5});
  const auto own = direct_rates(table, exposure_weights(table), direct(DirectMethod::gamma)).at(0);
  CHECK(own.rate == doctest::Approx(own.crude_rate).epsilon(1e-14));
  CHECK(own.expected == doctest::Approx(13).epsilon(1e-14));
  const Limits exact = rate_limits(13, 35, {});
  CHECK(own.low == doctest::Approx(exact.low).epsilon(1e-12));
  CHECK(own.high == doctest::Approx(exact.high).epsilon(1e-12));
  const auto half = direct_rates(table, std::vector<double>{5, 10, 2.5}, direct(DirectMethod::gamma)).at(0);
  CHECK(half.low == doctest::Approx(own.low).epsilon(1e-13));
}

TEST_CASE("one-sided direct limits are the ends of wider two-sided ones") {
  const auto table = one_group({4, 1, 9}, {10, 20, 5});
  const std::vector<double> weights = {1, 2, 1};
  for (const auto method :
       {DirectMethod::gamma, DirectMethod::mid_p, DirectMethod::dobson, DirectMethod::normal}) {
    const auto both = direct_rates(table, weights, direct(method, 0.9)).at(0);
    DirectSpec spec = direct(method, 0.95);
    spec.side = Side::lower;
    const auto lower = direct_rates(table, weights, spec).at(0);
    spec.side = Side::upper;
    const auto upper = direct_rates(table, weights, spec).at(0);
    CHECK(lower.low == doctest::Approx(both.low).epsilon(1e-12));
    CHECK(std::isinf(lower.high));
    CHECK(upper.high == doctest::Approx(both.high).epsilon(1e-12));
    CHECK(upper.low == 0);
  }
}

TEST_CASE("groups without events, strata without weight, what is refused") {
  const auto empty = one_group({0, 0}, {10, 4});
  const std::vector<double> weights = {1, 1};
  const auto gamma = direct_rates(empty, weights, direct(DirectMethod::gamma)).at(0);
  CHECK(gamma.low == 0);
  CHECK(gamma.high == doctest::Approx(std::log(40) * 0.5 / 4).epsilon(1e-12));
  CHECK(std::isnan(direct_rates(empty, weights, direct(DirectMethod::dobson)).at(0).low));
  CHECK(std::isnan(direct_rates(empty, weights, direct(DirectMethod::normal)).at(0).high));

  const auto hole = StrataTable{1, 3, {2, 0, 5}, {10, 0, 4}};
  CHECK_THROWS_AS(direct_rates(hole, std::vector<double>{1, 1, 1}, direct(DirectMethod::gamma)), Refusal);
  CHECK(missing_cells(hole, std::vector<double>{1, 1, 1}).at(0).stratum == 1);
  const auto without = direct_rates(hole, std::vector<double>{1, 0, 1}, direct(DirectMethod::gamma)).at(0);
  CHECK(without.rate == doctest::Approx((0.2 + 1.25) / 2));
  CHECK_THROWS_AS(direct_rates(empty, std::vector<double>{1, -1}, direct(DirectMethod::gamma)), Refusal);
  CHECK_THROWS_AS(direct_rates(empty, std::vector<double>{0, 0}, direct(DirectMethod::gamma)), Refusal);
  CHECK_THROWS_AS(direct_rates(empty, std::vector<double>{1}, direct(DirectMethod::gamma)), Refusal);
}

TEST_CASE("indirect standardisation: published data and limits by name") {
  for (const auto& row : reference_rows("comparisons_published.tsv", "indirect")) {
    const auto table = one_group(row.list("count"), row.list("exposure"));
    std::vector<double> standard = row.list("standard_count");
    for (std::size_t i = 0; i < standard.size(); ++i) standard[i] /= row.list("standard_exposure")[i];
    LimitsSpec spec;
    const auto exact = indirect_rates(table, standard, row.list("standard_exposure"), spec).at(0);
    spec.method = RateMethod::byar;
    const auto byar = indirect_rates(table, standard, {}, spec).at(0);
    row.check("expected", exact.expected);
    row.check("ratio", exact.ratio);
    row.check("low", exact.ratio_low);
    row.check("high", exact.ratio_high);
    row.check("byar_low", byar.ratio_low);
    row.check("byar_high", byar.ratio_high);
    CHECK(exact.rate == doctest::Approx(exact.ratio * 101 / 39220.0).epsilon(1e-12));
    CHECK(exact.low == doctest::Approx(exact.ratio_low * 101 / 39220.0).epsilon(1e-12));
    CHECK(std::isnan(byar.rate));
  }
}

TEST_CASE("a group that is the standard has ratio 1 and its own crude rate") {
  const auto table = one_group({4, 2}, {10, 20});
  const auto same =
      indirect_rates(table, std::vector<double>{0.4, 0.1}, std::vector<double>{10, 20}, {}).at(0);
  CHECK(same.ratio == doctest::Approx(1));
  CHECK(same.rate == doctest::Approx(same.crude_rate));
  const auto quiet = one_group({0, 0}, {10, 20});
  const auto nothing = indirect_rates(quiet, std::vector<double>{0, 0}, {}, {}).at(0);
  CHECK(std::isnan(nothing.ratio));
  CHECK(nothing.ratio_low == 0);
  CHECK(std::isinf(nothing.ratio_high));
  CHECK_THROWS_AS(indirect_rates(table, std::vector<double>{0, 0}, {}, {}), Refusal);
  CHECK_THROWS_AS(indirect_rates(table, std::vector<double>{0.1}, {}, {}), Refusal);
  CHECK_THROWS_AS(indirect_rates(table, std::vector<double>{0.1, -1}, {}, {}), Refusal);
}

TEST_CASE("rows are added up into cells") {
  const std::vector<double> counts = {1, 2, 3, 4, 9}, exposures = {10, 20, 30, 40, 1};
  const std::vector<std::int32_t> groups = {0, 1, 0, 1, -1}, strata = {0, 1, 0, 0, 0};
  const auto table = tabulate(counts, exposures, groups, strata, 2, 2);
  CHECK(table.counts == std::vector<double>{4, 0, 4, 2});
  CHECK(table.exposures == std::vector<double>{40, 0, 40, 20});
  CHECK(exposure_weights(table) == std::vector<double>{80, 20});
  CHECK_THROWS_AS(tabulate(counts, exposures, groups, std::vector<std::int32_t>{0}, 2, 2), Refusal);
}

}  // namespace
}  // namespace countsel
