// tests/engine/rates/dispersion_test.cpp -- Pearson's dispersion, published and by hand.
#include "engine/rates/dispersion.hpp"

#include <doctest/doctest.h>

#include <cmath>
#include <vector>

#include "engine/refusal.hpp"

namespace countsel {
namespace {

Dispersion one_group(const std::vector<double>& counts) {
  const std::vector<double> exposures(counts.size(), 1.0);
  const std::vector<std::int32_t> codes(counts.size(), 0);
  return pooled_dispersion(counts, exposures, codes, 1);
}

std::vector<double> spread_out(const std::vector<int>& times) {
  std::vector<double> counts;
  for (std::size_t value = 0; value < times.size(); ++value)
    counts.insert(counts.end(), static_cast<std::size_t>(times[value]), static_cast<double>(value));
  return counts;
}

TEST_CASE("horse kicks are Poisson (Bortkiewicz 1898), accidents are not (Greenwood and Yule 1920)") {
  // Statistics as recomputed in the gathered check values, cases C-horsekick-200 and C-greenwood-yule.
  const Dispersion kicks = one_group(spread_out({109, 65, 22, 3, 1}));
  CHECK(kicks.pearson == doctest::Approx(199.31147541).epsilon(1e-11));
  CHECK(kicks.df == 199);
  CHECK(dispersion_p(kicks) == doctest::Approx(0.480449531492).epsilon(1e-11));
  const Dispersion accidents = one_group(spread_out({447, 132, 42, 21, 3, 2}));
  CHECK(accidents.pearson == doctest::Approx(960.757475083).epsilon(1e-11));
  CHECK(dispersion_p(accidents) == doctest::Approx(9.56722262776e-15).epsilon(1e-10));
  CHECK(accidents.phi == doctest::Approx(960.757475083 / 646).epsilon(1e-11));
}

TEST_CASE("rows vary round their own group's rate") {
  // Group 0: rates 3 of 10, 9 of 20 round 12 / 30; group 1: 5, 5 of 1, 1 round 5: no spread at all.
  const std::vector<double> counts{3, 5, 9, 5}, exposures{10, 1, 20, 1};
  const std::vector<std::int32_t> codes{0, 1, 0, 1};
  const Dispersion d = pooled_dispersion(counts, exposures, codes, 2);
  CHECK(d.pearson == doctest::Approx(1. / 4 + 1. / 8).epsilon(1e-15));
  CHECK(d.df == 2);
  CHECK(d.phi == doctest::Approx(3. / 16).epsilon(1e-15));
  CHECK(at_least_one(d.phi) == 1);
  CHECK(at_least_one(2.5) == 2.5);
  CHECK(std::isnan(at_least_one(NAN)));
}

TEST_CASE("a group without events and rows left out count for nothing; a row a group leaves no answer") {
  const std::vector<double> counts{0, 0, 3, 5, 99}, exposures{1, 2, 1, 1, 1};
  const std::vector<std::int32_t> codes{0, 0, 1, 1, -1};
  const Dispersion d = pooled_dispersion(counts, exposures, codes, 2);
  CHECK(d.df == 1);
  CHECK(d.pearson == doctest::Approx(0.5).epsilon(1e-15));
  const Dispersion none = pooled_dispersion(std::vector<double>{3, 4}, std::vector<double>{1, 1},
                                            std::vector<std::int32_t>{0, 1}, 2);
  CHECK(none.df == 0);
  CHECK(std::isnan(none.phi));
  CHECK(std::isnan(dispersion_p(none)));
}

TEST_CASE("digits hold at counts of 1e9") {
  // Deviations of -+1 from 1e9 and -+3 from 2e9: 2 / 1e9 + 18 / 2e9, exactly.
  const std::vector<double> counts{1e9 - 1, 1e9 + 1, 2e9 + 3, 2e9 - 3}, exposures{0.1, 0.1, 0.2, 0.2};
  const std::vector<std::int32_t> codes{0, 0, 0, 0};
  CHECK(pooled_dispersion(counts, exposures, codes, 1).pearson == doctest::Approx(11e-9).epsilon(1e-12));
}

TEST_CASE("columns of different lengths are refused") {
  CHECK_THROWS_AS(pooled_dispersion(std::vector<double>{1, 2}, std::vector<double>{1},
                                    std::vector<std::int32_t>{0, 0}, 1),
                  Refusal);
}

}  // namespace
}  // namespace countsel
