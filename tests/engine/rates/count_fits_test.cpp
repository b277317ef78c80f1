// tests/engine/rates/count_fits_test.cpp -- fits against mpmath, edges, and what must not change them.
#include "engine/rates/count_fits.hpp"

#include <doctest/doctest.h>

#include <algorithm>
#include <cmath>
#include <vector>

#include "engine/numbers/random.hpp"
#include "engine/refusal.hpp"
#include "tests/engine/rates/reference_rows.hpp"

namespace countsel {
namespace {

using enum CountDistribution;

CountRows rows_of(const ReferenceRow& row) {
  const auto column = [&](const char* name) -> std::span<const double> {
    return row.inputs.contains(name) ? std::span<const double>(row.list(name)) : std::span<const double>();
  };
  return {row.list("counts"), column("exposures"), column("times")};
}

void check_fits(const std::string& prefix, CountDistribution distribution) {
  for (const ReferenceRow& row : reference_rows("count_fits.tsv", prefix)) {
    const CountFit fit = fit_count_distribution(rows_of(row), distribution);
    row.check("rate", fit.rate);
    row.check("spread", fit.spread);
    row.check("share", fit.extra_zeros);
    row.check("loglik", fit.loglik);
    CHECK(fit.converged);
    CHECK(fit.at_edge == false);
  }
}

TEST_CASE("fits reach the top that mpmath finds") {
  check_fits("fit-poisson-", poisson);
  check_fits("fit-negative-", negative_binomial);
  check_fits("fit-zeros-", zero_inflated_poisson);
  check_fits("fit-both-", zero_inflated_negative_binomial);
}

TEST_CASE("shapes of published data") {
  for (const ReferenceRow& row : reference_rows("count_fits.tsv", "published-shape-")) {
    const CountFit fit = fit_count_distribution(rows_of(row), negative_binomial);
    row.check("shape", 1 / fit.spread);
    row.check("scale", fit.rate * fit.spread);
    row.check("loglik", fit.loglik);
  }
}

TEST_CASE("without spread the negative binomial comes back as the Poisson, and says so") {
  for (const ReferenceRow& row : reference_rows("count_fits.tsv", "fit-poisson-calm")) {
    const auto fits = fit_count_distributions(rows_of(row));
    REQUIRE(fits.size() == 4);
    for (const CountFit& fit : fits) {
      CHECK(fit.at_edge == (fit.distribution != poisson));
      CHECK(fit.loglik == fits[0].loglik);
      CHECK(fit.rate == fits[0].rate);
      CHECK(fit.spread == 0);
      CHECK(fit.extra_zeros == 0);
      CHECK(fit.aic == doctest::Approx(2.0 * static_cast<double>(fit.parameters) - 2 * fit.loglik));
    }
    CHECK(fits[3].parameters == 3);
    CHECK(fits[3].bic == doctest::Approx(3 * std::log(8.0) - 2 * fits[0].loglik));
  }
}

TEST_CASE("added zeros over a Poisson: the wider model falls back on it") {
  for (const ReferenceRow& row : reference_rows("count_fits.tsv", "fit-zeros-zeros")) {
    const auto fits = fit_count_distributions(rows_of(row));
    CHECK(fits[3].at_edge);
    CHECK(fits[3].loglik == doctest::Approx(fits[2].loglik).epsilon(1e-12));
    CHECK(fits[3].extra_zeros == doctest::Approx(fits[2].extra_zeros).epsilon(1e-6));
    CHECK(fits[2].loglik > fits[1].loglik);
  }
}

TEST_CASE("no events: rate 0 and nothing else to say") {
  const std::vector<double> counts{0, 0, 0};
  for (const CountFit& fit : fit_count_distributions({counts, {}, {}})) {
    CHECK(fit.rate == 0);
    CHECK(fit.loglik == 0);
    CHECK(fit.at_edge == (fit.distribution != poisson));
  }
}

TEST_CASE("a frequency table is its rows written out; the order of rows is nothing; exposure only scales") {
  RandomStream stream(5);
  std::vector<double> counts, exposures, twice, values, seen;
  for (int i = 0; i < 300; ++i) {
    exposures.push_back(1 + std::floor(20 * stream.uniform()));
    counts.push_back(draw_poisson(stream, exposures.back() * draw_gamma(stream, 0.7) * 0.4));
    twice.push_back(exposures.back() * 1000);
  }
  const auto plain = fit_count_distributions({counts, exposures, {}});
  std::vector<double> back_counts(counts.rbegin(), counts.rend()),
      back_exposures(exposures.rbegin(), exposures.rend());
  const auto turned = fit_count_distributions({back_counts, back_exposures, {}});
  const auto scaled = fit_count_distributions({counts, twice, {}});
  const std::vector<double> once(counts.size(), 1.0);
  const auto weighted = fit_count_distributions({counts, exposures, once});
  for (std::size_t k = 0; k < 4; ++k) {
    CHECK(turned[k].loglik == plain[k].loglik);
    CHECK(weighted[k].loglik == plain[k].loglik);
    CHECK(scaled[k].loglik == doctest::Approx(plain[k].loglik).epsilon(1e-11));
    CHECK(scaled[k].rate * 1000 == doctest::Approx(plain[k].rate).epsilon(1e-7));
    CHECK(scaled[k].spread == doctest::Approx(plain[k].spread).epsilon(1e-6));
    CHECK(plain[k].loglik >= plain[0].loglik);
  }
  CHECK(plain[3].loglik >= std::max(plain[1].loglik, plain[2].loglik) - 1e-9);
}

TEST_CASE("a little spread among huge counts is found to its digits") {
  const std::vector<double> counts{1200345, 1187001, 1250789, 1201222, 1310456};
  const std::vector<double> exposures{1e6, 1e6, 1.05e6, 1e6, 1.1e6};
  const CountFit fit = fit_count_distribution({counts, exposures, {}}, negative_binomial);
  CHECK(fit.at_edge == false);
  CHECK(fit.spread < 1e-3);
  CHECK(fit.spread > 1e-6);
}

TEST_CASE("rows that are not counts are refused with their place") {
  const std::vector<double> bad{1, 2.5}, good{1, 2}, zero{1, 0}, three{1, 2, 3};
  CHECK_THROWS_AS(require_count_rows({bad, {}, {}}), Refusal);
  CHECK_THROWS_AS(require_count_rows({good, zero, {}}), Refusal);
  CHECK_THROWS_AS(require_count_rows({good, three, {}}), Refusal);
  CHECK_THROWS_AS(require_count_rows({{}, {}, {}}), Refusal);
  try {
    require_count_rows({bad, {}, {}});
  } catch (const Refusal& refusal) {
    CHECK(refusal.code == Code::bad_count);
    REQUIRE(refusal.places.size() == 1);
    CHECK(refusal.places[0].row == 2);
  }
}

}  // namespace
}  // namespace countsel
