// tests/engine/rates/funnel_test.cpp -- limits, standings and spread; that they cannot contradict each other.
#include "engine/rates/funnel.hpp"

#include <doctest/doctest.h>

#include <cmath>
#include <vector>

#include "engine/numbers/negative_binomial.hpp"
#include "engine/numbers/random.hpp"
#include "engine/refusal.hpp"
#include "tests/engine/rates/reference_rows.hpp"

namespace countsel {
namespace {

FunnelLimits limits_at(double exposure, const FunnelModel& model, double inner = 0.95, double outer = 0.998) {
  const std::vector<double> exposures{exposure};
  return funnel_limits(exposures, model, inner, outer);
}

TEST_CASE("limits of the cases after Spiegelhalter's appendix") {
  for (const ReferenceRow& row : reference_rows("funnel.tsv", "published-limits-")) {
    FunnelModel model;
    model.benchmark = 1;
    const FunnelLimits limits = limits_at(row.in("expected"), model);
    row.check("low_inner", limits.low_inner[0]);
    row.check("high_inner", limits.high_inner[0]);
    row.check("low_outer", limits.low_outer[0]);
    row.check("high_outer", limits.high_outer[0]);
  }
}

TEST_CASE("the steps are those that counting up finds, widened or not") {
  for (const ReferenceRow& row : reference_rows("funnel.tsv", "steps-")) {
    FunnelModel model;
    model.benchmark = 1;
    if (row.name.find("scaled") != std::string::npos) {
      model.widening = Widening::scaled;
      model.dispersion = row.in("dispersion");
    } else if (row.name.find("added") != std::string::npos) {
      model.widening = Widening::added;
      model.between_sd = row.in("between_sd");
    }
    const double band = row.in("band"), expected = row.in("expected");
    const FunnelLimits limits = limits_at(expected, model, band, 0.9999);
    row.check("low", std::round(limits.low_inner[0] * expected));
    row.check("high", std::round(limits.high_inner[0] * expected));
  }
}

TEST_CASE("spread between units, winsorised, with and without units that have no logarithm") {
  for (const ReferenceRow& row : reference_rows("funnel.tsv", "spread-")) {
    const UnitSpread spread =
        spread_between_units(row.list("counts"), row.list("expected"), row.in("winsorise"));
    row.check("dispersion", spread.dispersion);
    row.check("between_sd", spread.between_sd);
    row.check("on_log_scale", spread.on_log_scale);
  }
}

struct Units {
  std::vector<double> counts, exposures;
};
Units invented(std::size_t n, double wander) {
  RandomStream stream(11);
  Units units;
  for (std::size_t i = 0; i < n; ++i) {
    units.exposures.push_back(std::floor(20 + std::exp(7 * stream.uniform())));
    const double luck = wander > 0 ? draw_gamma(stream, 1 / wander) * wander : 1;
    units.counts.push_back(draw_poisson(stream, 0.08 * units.exposures.back() * luck));
  }
  return units;
}

TEST_CASE("a unit stands outside a band exactly when it lies outside the funnel there") {
  const Units units = invented(2000, 0.3);
  for (const Widening widening : {Widening::none, Widening::scaled, Widening::added}) {
    FunnelSpec spec;
    spec.widening = widening;
    const Funnel found = funnel(units.counts, units.exposures, spec);
    const FunnelLimits limits = funnel_limits(units.exposures, found.model, spec.inner, spec.outer);
    std::size_t beyond = 0;
    for (std::size_t i = 0; i < units.counts.size(); ++i) {
      const double rate = units.counts[i] / units.exposures[i];
      Standing wanted = Standing::within;
      if (rate < limits.low_inner[i]) wanted = Standing::low;
      if (rate > limits.high_inner[i]) wanted = Standing::high;
      if (rate < limits.low_outer[i]) wanted = Standing::far_low;
      if (rate > limits.high_outer[i]) wanted = Standing::far_high;
      CHECK(found.standing[i] == wanted);
      beyond += wanted != Standing::within;
    }
    CHECK(found.beyond_inner == beyond);
    CHECK(beyond > 20);
    CHECK(found.beyond_outer < found.beyond_inner);
  }
}

TEST_CASE("without spread beyond chance the widened model is the plain one") {
  const std::vector<double> counts{4, 9, 5, 12, 7, 3, 8, 6}, exposures{10, 20, 12.5, 25, 16, 8, 15, 14};
  FunnelSpec plain, scaled, added;
  scaled.widening = Widening::scaled;
  added.widening = Widening::added;
  const Funnel first = funnel(counts, exposures, plain);
  CHECK(first.spread.dispersion < 1);
  CHECK(first.spread.between_sd == 0);
  CHECK(funnel(counts, exposures, scaled).p_value == first.p_value);
  CHECK(funnel(counts, exposures, added).z == first.z);
  CHECK(std::isinf(funnel(counts, exposures, added).model.shape(5)));
}

TEST_CASE("widening moves every unit's p-value up, towards the middle") {
  const Units units = invented(500, 0.3);
  FunnelSpec plain, added;
  added.widening = Widening::added;
  const Funnel narrow = funnel(units.counts, units.exposures, plain),
               wide = funnel(units.counts, units.exposures, added);
  CHECK(wide.beyond_outer < narrow.beyond_outer / 2);
  for (std::size_t i = 0; i < units.counts.size(); ++i)
    if (narrow.p_value[i] < 0.01) CHECK(wide.p_value[i] > narrow.p_value[i]);
}

TEST_CASE(
    "the flag's size: units that only chance tells apart are flagged at most as often as the band says") {
  // Enumerated: the chance of a count outside the inner band, over expected counts from 0.1 to 200.
  FunnelModel model;
  model.benchmark = 1;
  for (double expected = 0.1; expected < 200; expected *= 1.31) {
    const FunnelLimits limits = limits_at(expected, model);
    const double infinity = std::numeric_limits<double>::infinity();
    const double low = std::round(limits.low_inner[0] * expected),
                 high = std::round(limits.high_inner[0] * expected);
    const double outside = negative_binomial_at_most(low - 1, infinity, expected) +
                           negative_binomial_at_least(high + 1, infinity, expected);
    CHECK(outside <= 0.05);
  }
}

TEST_CASE("the benchmark: overall, given, or none to speak of") {
  const std::vector<double> counts{2, 4, 0}, exposures{10, 10, 20}, zeros{0, 0, 0};
  CHECK(funnel(counts, exposures, {}).model.benchmark == doctest::Approx(0.15));
  FunnelSpec given;
  given.benchmark = 0.3;
  CHECK(funnel(counts, exposures, given).expected[2] == doctest::Approx(6));
  const Funnel nothing = funnel(zeros, exposures, {});
  CHECK(nothing.p_value == std::vector<double>{1, 1, 1});
  CHECK(nothing.beyond_inner == 0);
  CHECK(std::isnan(nothing.ratio[0]));
  CHECK(std::isnan(nothing.spread.dispersion));
  FunnelSpec wrong;
  wrong.inner = 0.998;
  CHECK_THROWS_AS(funnel(counts, exposures, wrong), Refusal);
  wrong = {};
  wrong.winsorise = 0.5;
  CHECK_THROWS_AS(funnel(counts, exposures, wrong), Refusal);
  wrong = {};
  wrong.benchmark = 0;
  CHECK_THROWS_AS(funnel(counts, exposures, wrong), Refusal);
}

TEST_CASE("the grid of exposures runs from the least to the greatest") {
  const std::vector<double> exposures{30, 2, 500}, alike{4, 4};
  const auto grid = funnel_exposures(exposures, 50);
  REQUIRE(grid.size() == 50);
  CHECK(grid.front() == 2);
  CHECK(grid.back() == 500);
  CHECK(grid[1] / grid[0] == doctest::Approx(grid[49] / grid[48]));
  CHECK(funnel_exposures(alike, 50) == std::vector<double>{4});
}

}  // namespace
}  // namespace countsel
