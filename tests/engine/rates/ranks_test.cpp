// tests/engine/rates/ranks_test.cpp -- ranks and how far they wander.
#include "engine/rates/ranks.hpp"

#include <doctest/doctest.h>

#include <cmath>
#include <numeric>
#include <thread>
#include <vector>

#include "engine/numbers/distributions.hpp"
#include "engine/refusal.hpp"

namespace countsel {
namespace {

// Two units: the chance that the first has the higher rate is a beta tail, so its expected rank is known.
TEST_CASE("the expected rank of one of two is one plus the chance of being second") {
  const std::vector<double> counts{9, 5}, exposures{100, 80};
  const UnitRatePrior prior{2, 40, 0.05, 0, false};
  RanksSpec spec;
  spec.draws = 50000;
  const UnitRanks ranks = rank_units(counts, exposures, prior, spec);
  // gamma(11)/140 > gamma(7)/120  <=>  beta(11, 7) > 140 / (140 + 120)
  const double first_higher = beta_above(11, 7, 140.0 / 260);
  CHECK(ranks.mean_rank[0] == doctest::Approx(2 - first_higher).epsilon(0.006));
  CHECK(ranks.mean_rank[0] + ranks.mean_rank[1] == doctest::Approx(3));
}

TEST_CASE("units far apart have sure ranks, units alike have none") {
  const std::vector<double> apart{1000, 100, 10}, same{10, 10, 10, 10}, exposures{100, 100, 100, 100};
  const UnitRatePrior prior{0.5, 1, 0.5, 0, false};
  const UnitRanks sure = rank_units(apart, std::span(exposures).first(3), prior, {});
  CHECK(sure.rank == std::vector<double>{1, 2, 3});
  CHECK(sure.low == std::vector<double>{1, 2, 3});
  CHECK(sure.high == std::vector<double>{1, 2, 3});
  const UnitRanks none = rank_units(same, exposures, prior, {});
  for (std::size_t i = 0; i < 4; ++i) {
    CHECK(none.rank[i] == 2.5);
    CHECK(none.low[i] == 1);
    CHECK(none.high[i] == 4);
    CHECK(none.mean_rank[i] == doctest::Approx(2.5).epsilon(0.05));
  }
}

TEST_CASE("no spread found: the middle rank, anything possible, nothing drawn") {
  const std::vector<double> counts{4, 9, 5}, exposures{10, 20, 12.5};
  const UnitRanks ranks = rank_units(counts, exposures, fit_unit_rates(counts, exposures), {});
  CHECK(ranks.rank == std::vector<double>{2, 2, 2});
  CHECK(ranks.low == std::vector<double>{1, 1, 1});
  CHECK(ranks.high == std::vector<double>{3, 3, 3});
  CHECK(ranks.draws == 0);
}

TEST_CASE("limits hold the rank; the mean of all ranks is the middle; hands and repetition change nothing") {
  RandomStream stream(4);
  std::vector<double> counts, exposures;
  for (int i = 0; i < 300; ++i) {
    exposures.push_back(5 + 200 * stream.uniform());
    counts.push_back(draw_poisson(stream, 0.1 * exposures.back() * draw_gamma(stream, 2) / 2));
  }
  const UnitRatePrior prior = fit_unit_rates(counts, exposures);
  RanksSpec spec;
  spec.draws = 333;
  const UnitRanks ranks = rank_units(counts, exposures, prior, spec);
  for (std::size_t i = 0; i < 300; ++i) {
    CHECK(ranks.low[i] <= ranks.rank[i]);
    CHECK(ranks.rank[i] <= ranks.high[i]);
    CHECK(ranks.low[i] >= 1);
    CHECK(ranks.high[i] <= 300);
  }
  CHECK(std::accumulate(ranks.mean_rank.begin(), ranks.mean_rank.end(), 0.0) / 300 == doctest::Approx(150.5));
  Work two;
  two.workers.hands = 2;
  two.workers.run = [](std::size_t tasks, const std::function<void(std::size_t)>& piece) {
    std::thread other([&] {
      for (std::size_t i = 1; i < tasks; i += 2) piece(i);
    });
    for (std::size_t i = 0; i < tasks; i += 2) piece(i);
    other.join();
  };
  const UnitRanks again = rank_units(counts, exposures, prior, spec, two);
  CHECK(again.mean_rank == ranks.mean_rank);
  CHECK(again.low == ranks.low);
  CHECK(again.high == ranks.high);
  spec.seed = 1;
  CHECK(rank_units(counts, exposures, prior, spec).mean_rank != ranks.mean_rank);
}

TEST_CASE("more units than can be drawn are ranked without limits; too many draws are refused") {
  const std::vector<double> counts(most_ranked_units + 1, 1.0), exposures(most_ranked_units + 1, 2.0);
  const UnitRatePrior prior{2, 4, 0.5, 0, false};
  const UnitRanks ranks = rank_units(counts, exposures, prior, {});
  CHECK(ranks.rank[0] == static_cast<double>(most_ranked_units + 2) / 2);
  CHECK(std::isnan(ranks.low[0]));
  RanksSpec spec;
  spec.draws = 1'000'000'000;
  CHECK_THROWS_AS(rank_units(std::span(counts).first(10), std::span(exposures).first(10), prior, spec),
                  Refusal);
}

}  // namespace
}  // namespace countsel
