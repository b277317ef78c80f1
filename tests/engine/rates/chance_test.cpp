// tests/engine/rates/chance_test.cpp -- chances for a count to come against sums and quadrature.
#include "engine/rates/chance.hpp"

#include <doctest/doctest.h>

#include <cmath>
#include <limits>
#include <numeric>

#include "engine/refusal.hpp"
#include "tests/engine/rates/reference_rows.hpp"

namespace countsel {
namespace {

const double nan = std::numeric_limits<double>::quiet_NaN();

void check(const ReferenceRow& row, const CountToCome& to_come) {
  const double k = row.in("k");
  row.check("at_least", chance_at_least(to_come, k));
  row.check("at_most", chance_at_most(to_come, k));
  row.check("exactly", chance_exactly(to_come, k));
  row.check("mean", to_come.mean);
  row.check("sd", to_come.sd);
}

TEST_CASE("both tails of a known mean, down to 1e-270") {
  for (const ReferenceRow& row : reference_rows("chance.tsv", "known-"))
    check(row, count_to_come(row.in("expected"), row.in("overdispersion")));
  for (const ReferenceRow& row : reference_rows("chance.tsv", "published-chance-"))
    check(row, count_to_come(row.in("expected")));
}

TEST_CASE("after a past record") {
  for (const ReferenceRow& row : reference_rows("chance.tsv", "past-"))
    check(row, count_to_come_after(row.in("count"), row.in("exposure"), row.in("next")));
  for (const ReferenceRow& row : reference_rows("chance.tsv", "wandering-"))
    check(row,
          count_to_come_after(row.in("count"), row.in("exposure"), row.in("next"), row.in("overdispersion")));
}

TEST_CASE("the likely range of the next year's shutdowns") {
  for (const ReferenceRow& row : reference_rows("chance.tsv", "published-range-")) {
    const LikelyRange range =
        likely_range(count_to_come_after(row.in("count"), row.in("exposure"), row.in("next")), 0.95);
    row.check("low", range.low);
    row.check("high", range.high);
  }
}

TEST_CASE("a likely range holds what it says, and no end can be spared") {
  for (const double overdispersion : {0.0, 0.2})
    for (const double mean : {0.01, 0.7, 5.0, 80.0, 3000.0}) {
      const CountToCome to_come = count_to_come(mean, overdispersion);
      const LikelyRange range = likely_range(to_come, 0.9);
      CHECK(chance_between(to_come, range.low, range.high) >= 0.9);
      CHECK(chance_at_least(to_come, range.high + 1) <= 0.05);
      if (range.high > 0) CHECK(chance_at_least(to_come, range.high) > 0.05);
      if (range.low > 0) CHECK(chance_at_most(to_come, range.low - 1) < 0.05);
    }
}

TEST_CASE("a little overdispersion joins none smoothly, and doubt only widens") {
  const CountToCome plain = count_to_come_after(24, 5, 1), little = count_to_come_after(24, 5, 1, 1e-9);
  for (const double k : {0.0, 4.0, 9.0, 15.0, 30.0})
    CHECK(chance_at_least(little, k) == doctest::Approx(chance_at_least(plain, k)).epsilon(1e-6));
  CHECK(little.mean == doctest::Approx(plain.mean).epsilon(1e-7));
  CHECK(little.sd == doctest::Approx(plain.sd).epsilon(1e-6));
  CHECK(count_to_come(4.9).sd < plain.sd);
  CHECK(plain.sd < count_to_come_after(24, 5, 1, 0.2).sd);
  CHECK(std::isinf(count_to_come_after(24, 5, 1, 0.5).sd));
}

TEST_CASE("between: narrow, wide, straddling, and on the thin side of a tail") {
  const CountToCome to_come = count_to_come(1e6);
  CHECK(chance_between(to_come, 5, 4) == 0);
  CHECK(chance_between(count_to_come(3), 2, 2) == chance_exactly(count_to_come(3), 2));
  CHECK(chance_between(to_come, 0, 2e6) == doctest::Approx(1).epsilon(1e-14));
  const double wide = chance_between(to_come, 1'008'000, 1'010'000);
  double summed = 0;
  for (double k = 1'010'000; k >= 1'008'000; --k) summed += chance_exactly(to_come, k);
  CHECK(wide == doctest::Approx(summed).epsilon(1e-11));
  CHECK(chance_between(to_come, 999'000, 1'001'000) == doctest::Approx(0.6830).epsilon(1e-3));
}

TEST_CASE("the list holds nearly all of the chance, what was asked for, and no more rows than allowed") {
  const CountChances list = list_chances(count_to_come(6), 20, nan);
  CHECK(list.step == 1);
  CHECK(list.value.front() == 0);
  CHECK(std::accumulate(list.chance.begin(), list.chance.end(), 0.0) > 0.9997);
  const CountChances reaching = list_chances(count_to_come(6), nan, 40);
  CHECK(reaching.value.back() == 40);
  CHECK(list_chances(count_to_come(1e9), nan, nan).value.size() <= 2000);
  CHECK(list_chances(count_to_come(0), nan, nan).value == std::vector<double>{0});
}

TEST_CASE("impossible requests are refused") {
  CHECK_THROWS_AS(count_to_come(-1), Refusal);
  CHECK_THROWS_AS(count_to_come(3, -0.1), Refusal);
  CHECK_THROWS_AS(count_to_come_after(2.5, 1, 1), Refusal);
  CHECK_THROWS_AS(count_to_come_after(2, 0, 1), Refusal);
  CHECK_THROWS_AS(count_to_come_after(2, 1, -1), Refusal);
  CHECK_THROWS_AS(likely_range(count_to_come(3), 1), Refusal);
}

}  // namespace
}  // namespace countsel
