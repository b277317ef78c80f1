// tests/engine/rates/kitagawa_test.cpp -- the split of a difference into rate and mix.
#include "engine/rates/kitagawa.hpp"

#include <doctest/doctest.h>

#include <initializer_list>

#include "engine/refusal.hpp"
#include "reference_rows.hpp"

namespace countsel {
namespace {

TEST_CASE("parts and limits by the definition in 50 digits") {
  for (const auto& row : reference_rows("kitagawa.tsv", "")) {
    std::vector<TwoRates> strata;
    for (std::size_t i = 0; i < row.list("count1").size(); ++i)
      strata.push_back(
          {row.list("count1")[i], row.list("exposure1")[i], row.list("count0")[i], row.list("exposure0")[i]});
    const auto split = rate_or_mix(strata, PartMethod::normal, row.in("confidence"));
    row.check("difference", split.difference.value);
    row.check("rate_part", split.rate.value);
    row.check("rate_low", split.rate.low);
    row.check("rate_high", split.rate.high);
    row.check("mix_part", split.mix.value);
    row.check("mix_low", split.mix.low);
    row.check("mix_high", split.mix.high);
    for (std::size_t i = 0; i < strata.size(); ++i) {
      row.check("rate_parts", split.strata[i].rate_part, i);
      row.check("mix_parts", split.strata[i].mix_part, i);
    }
    CHECK(split.rate.value + split.mix.value == doctest::Approx(split.difference.value).epsilon(1e-13));
  }
}

TEST_CASE("worked by hand: a low-rate stratum that grows is relief") {
  // Shares 1/2, 1/2 become 3/4, 1/4; rates stay 1 and 5: all of the fall from 3 to 2 is mix, half from each.
  const std::vector<TwoRates> strata = {{75, 75, 50, 50}, {125, 25, 250, 50}};
  const auto split = rate_or_mix(strata, PartMethod::normal, 0.95);
  CHECK(split.difference.value == doctest::Approx(-1));
  CHECK(split.rate.value == doctest::Approx(0));
  CHECK(split.mix.value == doctest::Approx(-1));
  CHECK(split.strata[0].mix_part == doctest::Approx(0.25 * (1 - 2.5)));
  CHECK(split.strata[1].mix_part == doctest::Approx(-0.25 * (5 - 2.5)));
}

TEST_CASE("same mix: all rate; swapping the groups turns every sign") {
  const std::vector<TwoRates> same_mix = {{7, 10, 3, 20}, {4, 5, 6, 10}};
  CHECK(rate_or_mix(same_mix, PartMethod::gamma, 0.95).mix.value == doctest::Approx(0));
  const std::vector<TwoRates> strata = {{7, 10, 3, 20}, {4, 15, 6, 10}, {0, 4, 2, 0.5}};
  std::vector<TwoRates> turned;
  for (const auto& s : strata) turned.push_back({s.count0, s.exposure0, s.count1, s.exposure1});
  for (const auto method : {PartMethod::normal, PartMethod::gamma}) {
    const auto a = rate_or_mix(strata, method, 0.9), b = rate_or_mix(turned, method, 0.9);
    CHECK(a.rate.value == doctest::Approx(-b.rate.value));
    CHECK(a.rate.low == doctest::Approx(-b.rate.high));
    CHECK(a.mix.high == doctest::Approx(-b.mix.low));
    CHECK(a.strata[2].mix_part == doctest::Approx(-b.strata[2].mix_part));
  }
}

TEST_CASE("the methods come close with many events and part with few") {
  const std::vector<TwoRates> many = {{7000, 10, 3000, 20}, {4000, 15, 6000, 10}};
  const auto normal = rate_or_mix(many, PartMethod::normal, 0.95),
             gamma = rate_or_mix(many, PartMethod::gamma, 0.95);
  const auto near = [](double a, double b, const Part& part) {
    return std::abs(a - b) < 0.01 * (part.high - part.low);
  };
  CHECK(near(gamma.rate.low, normal.rate.low, normal.rate));
  CHECK(near(gamma.rate.high, normal.rate.high, normal.rate));
  CHECK(near(gamma.mix.low, normal.mix.low, normal.mix));
  CHECK(near(gamma.mix.high, normal.mix.high, normal.mix));
  const std::vector<TwoRates> none = {{0, 10, 0, 20}, {0, 15, 0, 10}};
  CHECK(std::isnan(rate_or_mix(none, PartMethod::normal, 0.95).rate.low));
  const auto quiet = rate_or_mix(none, PartMethod::gamma, 0.95);
  CHECK(quiet.rate.value == 0);
  CHECK(quiet.rate.low < 0);
  CHECK(quiet.rate.high > 0);
}

TEST_CASE("one-sided limits are ends of wider two-sided ones") {
  const std::vector<TwoRates> strata = {{7, 10, 3, 20}, {4, 15, 6, 10}};
  for (const auto method : {PartMethod::normal, PartMethod::gamma}) {
    const auto both = rate_or_mix(strata, method, 0.9);
    const auto lower = rate_or_mix(strata, method, 0.95, Side::lower);
    const auto upper = rate_or_mix(strata, method, 0.95, Side::upper);
    CHECK(lower.rate.low == doctest::Approx(both.rate.low));
    CHECK(std::isinf(lower.rate.high));
    CHECK(upper.mix.high == doctest::Approx(both.mix.high));
    CHECK(upper.mix.low == -std::numeric_limits<double>::infinity());
  }
}

TEST_CASE("absent strata and refusals") {
  const std::vector<TwoRates> strata = {{7, 10, 3, 20}, {4, 15, 0, 0}, {0, 0, 0, 0}};
  const auto split = rate_or_mix(strata, PartMethod::normal, 0.95);
  CHECK(split.absent == std::vector<std::size_t>{1});
  CHECK(split.strata[1].rate_part == 0);
  CHECK(split.strata[2].mix_part == 0);
  CHECK_THROWS_AS(rate_or_mix(std::vector<TwoRates>{{1, 1, 0, 0}}, PartMethod::normal, 0.95), Refusal);
  CHECK_THROWS_AS(rate_or_mix({}, PartMethod::normal, 0.95), Refusal);
}

}  // namespace
}  // namespace countsel
