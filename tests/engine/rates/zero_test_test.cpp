// tests/engine/rates/zero_test_test.cpp -- the score test for too many zeros.
#include "engine/rates/zero_test.hpp"

#include <doctest/doctest.h>

#include <cmath>
#include <vector>

#include "engine/numbers/random.hpp"
#include "tests/engine/rates/reference_rows.hpp"

namespace countsel {
namespace {

ZeroTest tested(const ReferenceRow& row) {
  const auto column = [&](const char* name) -> std::span<const double> {
    return row.inputs.contains(name) ? std::span<const double>(row.list(name)) : std::span<const double>();
  };
  return zero_test({row.list("counts"), column("exposures"), column("times")});
}

TEST_CASE("against mpmath, with and without exposure") {
  for (const ReferenceRow& row : reference_rows("count_fits.tsv", "tests-")) {
    const ZeroTest test = tested(row);
    row.check("zeros", test.zeros);
    row.check("zeros_expected", test.zeros_expected);
    row.check("zeros_z", test.z);
    row.check("zeros_p", test.p_either);
    row.check("zeros_more", test.p_more);
  }
}

TEST_CASE("van den Broek's infections") {
  for (const ReferenceRow& row : reference_rows("count_fits.tsv", "published-zeros-"))
    row.check("zeros_statistic", tested(row).statistic);
}

TEST_CASE("its size: of Poisson counts with unequal exposures about one in twenty is called, either way") {
  RandomStream stream(9);
  int called = 0, trials = 2000;
  for (int trial = 0; trial < trials; ++trial) {
    std::vector<double> counts, exposures;
    for (int i = 0; i < 80; ++i) {
      exposures.push_back(0.3 + 2 * stream.uniform());
      counts.push_back(draw_poisson(stream, exposures.back()));
    }
    called += zero_test({counts, exposures, {}}).p_either < 0.05;
  }
  CHECK(called > 0.035 * trials);
  CHECK(called < 0.065 * trials);
}

TEST_CASE("means too large for exp() give an answer, not a NaN") {
  const std::vector<double> counts{1000, 1010, 0, 990}, none{1000, 1010, 0, 995}, exposures{1, 1, 1, 1},
      mixed{1, 1, 1e-6, 1};
  const ZeroTest impossible = zero_test({counts, exposures, {}});
  CHECK(impossible.z > 1e100);
  CHECK(impossible.p_more == 0);
  const ZeroTest harmless = zero_test({none, mixed, {}});
  CHECK(std::abs(harmless.z) < 1e-3);
  const std::vector<double> zeros{0, 0};
  CHECK(std::isnan(zero_test({zeros, {}, {}}).z));
  CHECK(zero_test({zeros, {}, {}}).zeros_expected == 2);
}

}  // namespace
}  // namespace countsel
