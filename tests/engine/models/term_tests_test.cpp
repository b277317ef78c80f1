// tests/engine/models/term_tests_test.cpp -- deviance lost against refits, joint tests against each other.
#include "engine/models/term_tests.hpp"

#include <doctest/doctest.h>

#include "engine/models/covariance.hpp"
#include "engine/numbers/distributions.hpp"
#include "synthetic.hpp"

using namespace countsel;
using namespace countsel::cases;

namespace {

void check_against_refits(const Design& design, const GlmData& data, double tolerance) {
  const GlmFit fit = fit_poisson(design, data);
  const auto tests = likelihood_term_tests(fit);
  REQUIRE(tests.size() == design.terms.size());
  for (const TermTest& test : tests) {
    CAPTURE(design.terms[test.term].name);
    const GlmFit smaller = fit_poisson(without_term(design, test.term), data);
    CHECK(test.df == static_cast<double>(fit.rank - smaller.rank));
    CHECK(test.deviance_lost == doctest::Approx(smaller.deviance - fit.deviance).epsilon(tolerance));
    if (test.df > 0) CHECK(test.p_value == doctest::Approx(chi_square_above(test.statistic, test.df)));
  }
}

}  // namespace

TEST_CASE("every term of the published fits") {
  for (const Json& given : read_json("poisson_cases.json")) {
    const std::string id = given["id"];
    CAPTURE(id);
    Ready ready;
    make_ready(ready, given);
    check_against_refits(ready.design, ready.data, 1e-8);
  }
}

TEST_CASE("terms of a larger table, with crosses whose main terms they lean on") {
  const Synthetic table(5000);
  check_against_refits(table.design, table.data(), 1e-8);
}

TEST_CASE("many rows: the sampled start and one pass are near enough") {
  const Synthetic table(250000, false);
  check_against_refits(table.design, table.data(), 2e-5);
}

TEST_CASE("aliased and infinite terms") {
  for (const Json& given : read_json("hard_cases.json")) {
    const std::string id = given["id"];
    if (id != "h_alias_exact" && id != "h_zero_event_level" && id != "h_n_less_than_p") continue;
    CAPTURE(id);
    Ready ready;
    make_ready(ready, given);
    check_against_refits(ready.design, ready.data, 1e-9);
  }
}

TEST_CASE("Wald and F tests") {
  const Synthetic table(5000, false);
  const GlmFit fit = table.fit();
  auto tests = likelihood_term_tests(fit);
  const auto scaled = scaled_term_tests(fit, 2.0);
  for (std::size_t t = 0; t < tests.size(); ++t) {
    CHECK(scaled[t].statistic == doctest::Approx(tests[t].statistic / tests[t].df / 2));
    CHECK(scaled[t].p_value == doctest::Approx(f_above(scaled[t].statistic, scaled[t].df, fit.df)));
  }
  wald_term_tests(fit, fit.covariance, tests);
  for (const TermTest& test : tests) {
    const TermColumns& term = table.design.terms[test.term];
    if (term.size() != 1) continue;
    const double z = fit.coefficients[term.first] / fit.errors[term.first];
    CHECK(test.statistic == doctest::Approx(z * z).epsilon(1e-10));
  }
}
