// tests/engine/rates/dispersion_tests_test.cpp -- the index of dispersion against mpmath and published data.
#include "engine/rates/dispersion_tests.hpp"

#include <doctest/doctest.h>

#include <algorithm>
#include <cmath>
#include <fstream>
#include <vector>

#include "tests/engine/rates/reference_rows.hpp"

namespace countsel {
namespace {

TEST_CASE("statistic and both tails") {
  for (const char* prefix : {"tests-", "published-tests-"})
    for (const ReferenceRow& row : reference_rows("count_fits.tsv", prefix)) {
      const auto column = [&](const char* name) -> std::span<const double> {
        return row.inputs.contains(name) ? std::span<const double>(row.list(name))
                                         : std::span<const double>();
      };
      const DispersionTest test = dispersion_test({row.list("counts"), column("exposures"), column("times")});
      row.check("mean", test.mean);
      row.check("variance", test.variance);
      row.check("statistic", test.statistic);
      row.check("df", test.df);
      row.check("p_above", test.p_above);
      row.check("p_below", test.p_below);
      CHECK(test.p_either == std::min(1.0, 2 * std::min(test.p_above, test.p_below)));
      if (column("exposures").empty()) CHECK(test.dispersion == doctest::Approx(test.variance / test.mean));
    }
}

TEST_CASE("coal-mining explosions by year, after Jarrett 1979") {
  for (const ReferenceRow& row : reference_rows("count_fits.tsv", "published-coal")) {
    const DispersionTest test = dispersion_test({row.list("counts"), {}, {}});
    row.check("statistic", test.statistic);
    row.check("df", test.df);
    row.check("mean", test.mean);
    row.check("p_above", test.p_above);
  }
}

TEST_CASE("counts too even are seen from below") {
  const std::vector<double> even(40, 7.0);
  const DispersionTest test = dispersion_test({even, {}, {}});
  CHECK(test.statistic == 0);
  CHECK(test.p_below == 0);
  CHECK(test.p_above == 1);
}

TEST_CASE("what cannot be tested has no value") {
  const std::vector<double> one{3}, zeros{0, 0, 0}, two_times{2};
  CHECK(std::isnan(dispersion_test({one, {}, {}}).statistic));
  CHECK(dispersion_test({one, {}, {}}).mean == 3);
  CHECK(std::isnan(dispersion_test({zeros, {}, {}}).p_either));
  CHECK(dispersion_test({zeros, {}, {}}).variance == 0);
  CHECK(dispersion_test({one, {}, two_times}).df == 1);
}

TEST_CASE("exposure only scales, and the least expected count is told") {
  const std::vector<double> counts{3, 1, 7}, exposures{10, 5, 30}, more{1000, 500, 3000};
  CHECK(dispersion_test({counts, exposures, {}}).statistic ==
        doctest::Approx(dispersion_test({counts, more, {}}).statistic));
  CHECK(smallest_expected({counts, exposures, {}}) == doctest::Approx(11.0 / 45 * 5));
}

}  // namespace
}  // namespace countsel
