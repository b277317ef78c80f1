// tests/engine/rates/count_fits_frequencies_test.cpp -- expected frequencies and the pooled test of fit.
#include "engine/rates/count_fits_frequencies.hpp"

#include <doctest/doctest.h>

#include <cmath>
#include <numeric>
#include <vector>

#include "engine/numbers/distributions.hpp"
#include "engine/numbers/random.hpp"
#include "tests/engine/rates/reference_rows.hpp"

namespace countsel {
namespace {

using enum CountDistribution;

FrequencyTable table_of(const CountRows& rows) {
  return frequency_table(rows, fit_count_distribution(rows, poisson),
                         fit_count_distribution(rows, negative_binomial));
}
double total(const std::vector<double>& values) { return std::accumulate(values.begin(), values.end(), 0.0); }

TEST_CASE("horse kicks and accidents: expected frequencies, pooled classes and fit") {
  for (const char* prefix : {"published-tests-", "published-expected-"})
    for (const ReferenceRow& row : reference_rows("count_fits.tsv", prefix)) {
      const FrequencyTable table = table_of({row.list("counts"), {}, row.list("times")});
      for (std::size_t k = 0; k < table.value.size(); ++k) {
        CHECK(table.value[k] == static_cast<double>(k));
        CHECK(table.observed[k] == row.list("times")[k]);
        row.check("poisson", table.poisson[k], k);
      }
      const GoodnessOfFit fit = poisson_fit(table);
      row.check("fit_statistic", fit.statistic);
      row.check("fit_df", fit.df);
      row.check("fit_p", fit.p_value);
      REQUIRE(fit.classes.size() == 4);
      CHECK(fit.classes[3].from == 3);
      CHECK(std::isinf(fit.classes[3].to));
    }
}

TEST_CASE("everything expected adds up to the rows, whatever the width and the exposures") {
  RandomStream stream(21);
  for (const double scale : {0.5, 40.0, 5000.0}) {
    std::vector<double> counts, exposures;
    for (int i = 0; i < 3000; ++i) {
      exposures.push_back(0.5 + stream.uniform());
      counts.push_back(draw_poisson(stream, scale * exposures.back() * draw_gamma(stream, 20) / 20));
    }
    const FrequencyTable table = table_of({counts, exposures, {}});
    CHECK(total(table.observed) == 3000);
    CHECK(total(table.poisson) + table.poisson_below + table.poisson_above ==
          doctest::Approx(3000).epsilon(1e-10));
    CHECK(total(table.negative_binomial) + table.negative_binomial_below + table.negative_binomial_above ==
          doctest::Approx(3000).epsilon(1e-10));
    CHECK((table.width == 1) == (scale < 1000));
    CHECK(table.value.size() <= 400);
    const GoodnessOfFit fit = poisson_fit(table);
    for (std::size_t k = 1; k + 1 < fit.classes.size(); ++k) CHECK(fit.classes[k].expected >= 5);
    for (std::size_t k = 1; k < fit.classes.size(); ++k)
      CHECK(fit.classes[k].from == fit.classes[k - 1].to + 1);
    CHECK(fit.classes.front().expected >= 1);
    CHECK(fit.classes.back().expected >= 1);
  }
}

TEST_CASE("unequal exposures are not taken for a bad fit") {
  // Each row's own mean: expected zeros by hand.
  const std::vector<double> counts{0, 2, 9, 1, 0, 12}, exposures{1, 2, 10, 1, 0.5, 11};
  const CountFit fit = fit_count_distribution({counts, exposures, {}}, poisson);
  const FrequencyTable table = frequency_table({counts, exposures, {}}, fit, fit);
  double zeros = 0;
  for (const double exposure : exposures) zeros += std::exp(-24 / 25.5 * exposure);
  CHECK(table.poisson[0] == doctest::Approx(zeros).epsilon(1e-13));
}

TEST_CASE("with more exposures than are kept apart, expected frequencies hold to four digits") {
  RandomStream stream(22);
  std::vector<double> counts, exposures;
  for (int i = 0; i < 6000; ++i) {
    exposures.push_back(std::exp(3 * stream.uniform()));
    counts.push_back(draw_poisson(stream, 2 * exposures.back()));
  }
  const CountFit fit = fit_count_distribution({counts, exposures, {}}, poisson);
  const FrequencyTable table = frequency_table({counts, exposures, {}}, fit, fit);
  for (std::size_t k = 0; k < table.value.size(); k += 7) {
    double exact = 0;
    for (const double exposure : exposures) exact += poisson_exactly(table.value[k], fit.rate * exposure);
    CHECK(table.poisson[k] == doctest::Approx(exact).epsilon(1e-4));
  }
}

TEST_CASE("too few classes: no test") {
  const std::vector<double> counts{0, 1, 0};
  const GoodnessOfFit fit = poisson_fit(table_of({counts, {}, {}}));
  CHECK(std::isnan(fit.p_value));
  const std::vector<double> far{1'000'000, 1'000'500, 999'700};
  const FrequencyTable table = table_of({far, {}, {}});
  CHECK(table.value.front() == 999'700);
  CHECK(table.poisson_below > 0.5);
}

}  // namespace
}  // namespace countsel
