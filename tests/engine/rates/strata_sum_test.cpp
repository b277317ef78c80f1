// tests/engine/rates/strata_sum_test.cpp -- the sum of conditional binomials against plain convolution.
#include "engine/rates/strata_sum.hpp"

#include <doctest/doctest.h>

#include <cmath>
#include <initializer_list>
#include <numeric>

#include "engine/numbers/distributions.hpp"

namespace countsel {
namespace {

// P(A = k) at a ratio, by multiplying out the strata one after another.
std::vector<double> convolved(const std::vector<TwoRates>& strata, double ratio) {
  std::vector<double> chances = {1};
  for (const auto& s : strata) {
    if (!(s.exposure1 > 0 && s.exposure0 > 0)) continue;
    const double m = s.count1 + s.count0, p = ratio * s.exposure1 / (ratio * s.exposure1 + s.exposure0);
    std::vector<double> next(chances.size() + static_cast<std::size_t>(m));
    for (std::size_t i = 0; i < chances.size(); ++i)
      for (double k = 0; k <= m; ++k)
        next[i + static_cast<std::size_t>(k)] += chances[i] * binomial_exactly(k, m, p);
    chances = next;
  }
  return chances;
}

const std::vector<std::vector<TwoRates>> examples = {
    {{2, 10, 0, 14}, {1, 3, 1, 9.5}, {0, 7, 2, 6}, {3, 4, 0, 1}, {0, 5, 0, 6}},
    {{5, 10, 3, 12}, {4, 9, 0, 0}, {2, 5, 6, 8}},
    {{1, 1, 1, 1}},
    {{40, 3, 60, 5}, {700, 9, 500, 8}, {3, 1, 0, 50}},
    {{30, 1e6, 2, 1}, {1, 1, 20, 1e6}},
};

TEST_CASE("tails and chances equal those of plain convolution, far out too") {
  for (const auto& strata : examples) {
    const StrataSum sum = strata_sum(strata, true);
    const auto at = static_cast<std::size_t>(sum.seen);
    for (const double d : {-8.0, -2.0, -0.5, -0.01, 0.0, 0.001, 0.3, 1.5, 6.0}) {
      const auto chances = convolved(strata, std::exp(sum.log_ratio + d));
      // The small tail by adding up from its far end.
      double at_least = 0, at_most = 0;
      for (std::size_t k = chances.size(); k-- > at;) at_least += chances[k];
      for (std::size_t k = 0; k <= at; ++k) at_most += chances[k];
      CAPTURE(d);
      CAPTURE(strata.size());
      CAPTURE(sum.seen);
      CHECK(at_least_seen(sum, d) == doctest::Approx(at_least).epsilon(2e-12));
      CHECK(at_most_seen(sum, d) == doctest::Approx(at_most).epsilon(2e-12));
      if (chances[at] > 1e-290) CHECK(exactly_seen(sum, d) == doctest::Approx(chances[at]).epsilon(2e-12));
    }
  }
}

TEST_CASE("one stratum is a binomial, whatever the count") {
  for (const double size : {10.0, 1e4, 1e7, 1e9}) {
    const double x1 = std::round(0.4 * size), x0 = std::round(0.6 * size);
    const std::vector<TwoRates> strata = {{x1, 3, x0, 7}};
    const StrataSum sum = strata_sum(strata, true);
    CHECK(sum.log_ratio == doctest::Approx(std::log(x1 / 3 / (x0 / 7))).epsilon(1e-14));
    for (const double z : {-5.0, -1.96, 0.5, 3.0}) {
      const double d = z / std::sqrt(0.24 * size);
      const double odds = std::exp(sum.log_ratio + d) * 3 / 7, p = odds / (1 + odds);
      CAPTURE(size);
      CAPTURE(z);
      const double accuracy = size < 1e8 ? 1e-11 : 2e-10;
      CHECK(at_least_seen(sum, d) == doctest::Approx(binomial_at_least(x1, x1 + x0, p)).epsilon(accuracy));
      CHECK(at_most_seen(sum, d) == doctest::Approx(binomial_at_most(x1, x1 + x0, p)).epsilon(accuracy));
    }
  }
}

TEST_CASE("the chances add up to one and have the estimate's mean") {
  for (const auto& strata : examples) {
    const StrataSum sum = strata_sum(strata, true);
    CHECK(std::accumulate(sum.chances.begin(), sum.chances.end(), 0.0) == doctest::Approx(1).epsilon(1e-13));
    double mean = 0;
    for (std::size_t k = 0; k < sum.chances.size(); ++k)
      mean += sum.chances[k] * (sum.first + static_cast<double>(k));
    CHECK(mean == doctest::Approx(sum.seen).epsilon(1e-12));
  }
}

TEST_CASE("the centred cumulant joins its series and mirrors") {
  for (const double p : {1e-9, 0.02, 0.5, 0.9}) {
    for (const double sign : {-1.0, 1.0}) {
      const double below = centred_cumulant(p, 1 - p, 0.0029999 * sign);
      const double above = centred_cumulant(p, 1 - p, 0.0030001 * sign);
      CHECK(above / below == doctest::Approx(std::pow(30001.0 / 29999, 2)).epsilon(1e-6));
    }
    CHECK(centred_cumulant(p, 1 - p, 0.7) ==
          doctest::Approx(centred_cumulant(1 - p, p, -0.7)).epsilon(1e-12));
    CHECK(centred_cumulant(p, 1 - p, 0) == 0);
    CHECK(centred_cumulant(p, 1 - p, 900) == doctest::Approx(900 * (1 - p) + std::log(p)).epsilon(1e-13));
    CHECK(centred_cumulant(p, 1 - p, -900) == doctest::Approx(900 * p + std::log1p(-p)).epsilon(1e-13));
  }
}

}  // namespace
}  // namespace countsel
