// tests/engine/rates/shrinkage_test.cpp -- the units' prior, and what it does to their rates.
#include "engine/rates/shrinkage.hpp"

#include <doctest/doctest.h>

#include <cmath>
#include <vector>

#include "engine/numbers/random.hpp"
#include "engine/refusal.hpp"
#include "tests/engine/rates/reference_rows.hpp"

namespace countsel {
namespace {

TEST_CASE("the prior that makes the counts likeliest") {
  for (const ReferenceRow& row : reference_rows("shrinkage.tsv", "prior-")) {
    const UnitRatePrior prior = fit_unit_rates(row.list("counts"), row.list("exposures"));
    row.check("shape", prior.shape);
    row.check("rate", prior.rate);
    row.check("loglik", prior.loglik);
    CHECK(prior.mean == doctest::Approx(prior.shape / prior.rate));
    CHECK(prior.no_spread == false);
  }
}

TEST_CASE("posterior means and limits under a given prior") {
  for (const ReferenceRow& row : reference_rows("shrinkage.tsv", "posterior-")) {
    const UnitRatePrior prior{row.in("shape"), row.in("rate"), row.in("shape") / row.in("rate"), 0, false};
    const ShrunkRates shrunk = shrink_rates(row.list("counts"), row.list("exposures"), prior, 0.95);
    for (std::size_t i = 0; i < shrunk.rate.size(); ++i) {
      row.check("rates", shrunk.rate[i], i);
      row.check("low", shrunk.low[i], i);
      row.check("high", shrunk.high[i], i);
    }
  }
  for (const ReferenceRow& row : reference_rows("shrinkage.tsv", "published-posterior-")) {
    const UnitRatePrior prior{row.in("shape"), row.in("rate"), row.in("shape") / row.in("rate"), 0, false};
    const ShrunkRates shrunk =
        shrink_rates(row.list("count"), row.list("exposure"), prior, row.in("confidence"));
    row.check("mean", shrunk.rate[0]);
    row.check("high", shrunk.high[0]);
  }
}

TEST_CASE("expected claims of Efron and Hastie's table") {
  for (const ReferenceRow& row : reference_rows("shrinkage.tsv", "published-claims")) {
    const double shape = row.in("shape"), rate = 1 / row.in("scale");
    const std::vector<double> ones(row.list("counts").size(), 1.0);
    const ShrunkRates shrunk =
        shrink_rates(row.list("counts"), ones, {shape, rate, shape / rate, 0, false}, 0.95);
    for (std::size_t i = 0; i < ones.size(); ++i) row.check("means", shrunk.rate[i], i);
  }
}

TEST_CASE("every rate is drawn towards the mean, those with little exposure most") {
  RandomStream stream(2);
  std::vector<double> counts, exposures;
  for (int i = 0; i < 400; ++i) {
    exposures.push_back(10 + 990 * stream.uniform());
    counts.push_back(draw_poisson(stream, 0.02 * exposures.back() * draw_gamma(stream, 3) / 3));
  }
  const UnitRatePrior prior = fit_unit_rates(counts, exposures);
  CHECK(prior.shape == doctest::Approx(3).epsilon(0.35));
  const ShrunkRates shrunk = shrink_rates(counts, exposures, prior, 0.95);
  for (std::size_t i = 0; i < counts.size(); ++i) {
    const double own = counts[i] / exposures[i], pull = prior.rate / (prior.rate + exposures[i]);
    CHECK(shrunk.rate[i] == doctest::Approx(own + pull * (prior.mean - own)).epsilon(1e-12));
    CHECK(shrunk.low[i] < shrunk.rate[i]);
    CHECK(shrunk.rate[i] < shrunk.high[i]);
  }
}

TEST_CASE("no spread beyond chance: one rate for all, flagged, with the limits of the whole") {
  const std::vector<double> counts{4, 9, 5, 12, 7, 3, 8, 6}, exposures{10, 20, 12.5, 25, 16, 8, 15, 14};
  const UnitRatePrior prior = fit_unit_rates(counts, exposures);
  CHECK(prior.no_spread);
  CHECK(std::isinf(prior.shape));
  const ShrunkRates shrunk = shrink_rates(counts, exposures, prior, 0.95);
  for (const double rate : shrunk.rate) CHECK(rate == doctest::Approx(54 / 120.5));
  CHECK(shrunk.low[0] < shrunk.rate[0]);
  CHECK(shrunk.high[0] > shrunk.rate[0]);
  const std::vector<double> zeros(8, 0.0);
  const UnitRatePrior nothing = fit_unit_rates(zeros, exposures);
  CHECK(nothing.no_spread);
  CHECK(nothing.mean == 0);
  CHECK(shrink_rates(zeros, exposures, nothing, 0.95).low[0] == 0);
}

TEST_CASE("the unit of exposure is nothing to the shape") {
  const std::vector<double> counts{3, 0, 12, 1, 0, 7, 25}, exposures{480, 210, 730, 400, 150, 520, 880};
  std::vector<double> hours;
  for (const double exposure : exposures) hours.push_back(24 * exposure);
  const UnitRatePrior days = fit_unit_rates(counts, exposures), in_hours = fit_unit_rates(counts, hours);
  CHECK(in_hours.shape == doctest::Approx(days.shape).epsilon(1e-10));
  CHECK(in_hours.rate == doctest::Approx(24 * days.rate).epsilon(1e-10));
  CHECK_THROWS_AS(shrink_rates(counts, exposures, days, 0), Refusal);
}

}  // namespace
}  // namespace countsel
