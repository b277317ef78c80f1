// tests/engine/models/glm_test.cpp -- published fits and hard cases, to the digits asked for.
#include "engine/models/glm.hpp"

#include <doctest/doctest.h>

#include "cases.hpp"

using namespace countsel;
using namespace countsel::cases;

TEST_CASE("every published Poisson fit is reproduced from its 60-digit recomputation") {
  for (const Json& given : read_json("poisson_cases.json")) {
    const std::string id = given["id"];
    CAPTURE(id);
    Ready ready;
    make_ready(ready, given);
    const GlmFit fit = fit_poisson(ready.design, ready.data);
    const Json& expected = given["recomputed"];
    CHECK(fit.converged);
    const auto names = expected["names"].get<std::vector<std::string>>();
    REQUIRE(names.size() == ready.design.coefficients);
    for (std::size_t i = 0; i < names.size(); ++i) {
      CAPTURE(names[i]);
      REQUIRE(ready.coefficient_of.contains(names[i]));
      const std::size_t k = ready.coefficient_of[names[i]];
      const double se = number(expected["se"][i]);
      // Nine digits of a coefficient; of one that is small beside its error, of the error.
      CHECK(digits(fit.coefficients[k], number(expected["coef"][i]), 1e-2 * se) > 10);
      CHECK(digits(fit.errors[k], se) > 10);
      for (std::size_t j = 0; j < names.size(); ++j)
        CHECK(digits(fit.covariance(k, ready.coefficient_of[names[j]]), number(expected["cov"][i][j]),
                     1e-3 * se * fit.errors[ready.coefficient_of[names[j]]]) > 8);
    }
    CHECK(digits(fit.loglik, number(expected["loglik"])) > 13);
    CHECK(digits(fit.deviance, number(expected["deviance"]), 1e-6) > 8);
    if (expected.contains("pearson")) CHECK(digits(fit.pearson, number(expected["pearson"]), 1e-6) > 8);
    if (number(expected["deviance"]) > 1e-3) {
      CHECK(digits(fit.deviance, number(expected["deviance"])) > 11);
      CHECK(digits(fit.pearson, number(expected["pearson"])) > 11);
    }
    CHECK(digits(fit.null_deviance, number(expected["null_deviance"])) > 12);
    CHECK(digits(fit.null_loglik, number(expected["null_loglik"])) > 12);
    CHECK(digits(fit.aic(), number(expected["aic"])) > 12);
    CHECK(digits(fit.bic(), number(expected["bic"])) > 12);
    CHECK(fit.df == number(expected["df_resid"]));
    if (expected.contains("quasi"))
      CHECK(digits(fit.dispersion, number(expected["quasi"]["scale_pearson"])) > 11);
  }
}

namespace {

void check_finite_part(const GlmFit& fit, Ready& ready, const Json& part) {
  for (std::size_t i = 0; i < part["names"].size(); ++i) {
    const std::string name = part["names"][i];
    CAPTURE(name);
    REQUIRE(ready.coefficient_of.contains(name));
    const std::size_t k = ready.coefficient_of[name];
    const double se = part.contains("se") ? number(part["se"][i]) : fit.errors[k];
    CHECK(digits(fit.coefficients[k], number(part["coef"][i]), 1e-3 * se) > 9.5);
    CHECK(digits(fit.errors[k], se) > 9);
  }
  for (const char* figure : {"loglik", "deviance", "pearson"})
    if (part.contains(figure)) {
      CAPTURE(figure);
      const double got = figure == std::string("loglik")     ? fit.loglik
                         : figure == std::string("deviance") ? fit.deviance
                                                             : fit.pearson;
      CHECK(digits(got, number(part[figure]), 1e-3) > 9);
    }
}

}  // namespace

TEST_CASE("the hard cases come out as they should") {
  for (const Json& given : read_json("hard_cases.json")) {
    const std::string id = given["id"];
    CAPTURE(id);
    const Json& expected = given["expected"];
    const std::string outcome = expected["outcome"];
    Ready ready;
    make_ready(ready, given);
    const GlmFit fit = fit_poisson(ready.design, ready.data);
    CHECK(fit.converged);
    if (outcome == "mle") {
      Json part = expected;
      if (!part.contains("names")) part["names"] = Json::array({"baseline"});
      check_finite_part(fit, ready, part);
      for (const CoefficientStatus status : fit.status) CHECK(status == CoefficientStatus::finite);
      CHECK(fit.separated_rows.empty());
      if (expected.contains("df_resid")) CHECK(fit.df == number(expected["df_resid"]));
      if (expected.contains("bic")) CHECK(digits(fit.bic(), number(expected["bic"])) > 12);
      if (expected.contains("n_effective")) CHECK(fit.rows == number(expected["n_effective"]));
      if (fit.df == 0) CHECK(std::isnan(fit.dispersion));
    } else if (outcome == "boundary") {
      check_finite_part(fit, ready, expected["poisson"]);
    } else if (outcome == "aliased") {
      CHECK(fit.rank == expected["rank"].get<std::size_t>());
      CHECK(fit.df == number(expected["df_resid"]));
      CHECK(fit.aliases.size() == ready.design.coefficients - fit.rank);
      if (expected.contains("reduced_model")) check_finite_part(fit, ready, expected["reduced_model"]);
      if (expected.contains("loglik")) CHECK(digits(fit.loglik, number(expected["loglik"])) > 12);
    } else if (outcome == "infinite") {
      for (const std::string name : expected["infinite"]) {
        const std::size_t k = ready.coefficient_of.at(name);
        CHECK(fit.status[k] == CoefficientStatus::minus_infinity);
        CHECK(fit.coefficients[k] == -INFINITY);
        CHECK(std::isnan(fit.errors[k]));
      }
      if (expected.contains("finite_part")) check_finite_part(fit, ready, expected["finite_part"]);
      CHECK(digits(fit.loglik, number(expected["sup_loglik"]), 1e-3) > 9);
    }
  }
}

TEST_CASE("an aliased column is named with what it is made of") {
  for (const Json& given : read_json("hard_cases.json")) {
    if (given["id"] != "h_alias_exact") continue;
    Ready ready;
    make_ready(ready, given);
    const GlmFit fit = fit_poisson(ready.design, ready.data);
    REQUIRE(fit.aliases.size() == 1);  // x2 = 2 x1 + 3
    CHECK(fit.aliases[0].coefficient == 2);
    std::map<std::size_t, double> parts(fit.aliases[0].combination.begin(), fit.aliases[0].combination.end());
    CHECK(parts[0] == doctest::Approx(3).epsilon(1e-13));
    CHECK(parts[1] == doctest::Approx(2).epsilon(1e-13));
    CHECK(std::isnan(fit.coefficients[2]));
  }
}

TEST_CASE("shifts, scales, huge counts, exposures and near-dependences keep their digits") {
  for (const Json& given : read_json("extreme_cases.json")) {
    const std::string name = given["name"];
    CAPTURE(name);
    const std::vector<double> count = numbers(given["count"]), exposure = numbers(given["exposure"]);
    std::vector<std::vector<double>> store;
    for (const Json& column : given["columns"]) store.push_back(numbers(column));
    std::vector<SourceColumn> columns;
    std::vector<Term> terms;
    for (std::size_t j = 0; j < store.size(); ++j) {
      columns.push_back({"x" + std::to_string(j), store[j], {}, nullptr, std::nullopt});
      terms.push_back(slope_of(j));
    }
    const Design design = make_design(columns, terms, count.size(), exposure);
    const GlmFit fit = fit_poisson(design, {count, exposure, {}, {}, WeightsAre::frequency});
    CHECK(fit.converged);
    CHECK(fit.aliases.empty());
    CAPTURE(fit.condition);
    for (std::size_t k = 0; k < given["coef"].size(); ++k) {
      CAPTURE(k);
      const double se = number(given["se"][k]);
      CHECK(digits(fit.coefficients[k], number(given["coef"][k]), 1e-2 * se) > 9);
      CHECK(digits(fit.errors[k], se) > 7);
    }
    CHECK(digits(fit.loglik, number(given["loglik"])) > 11);
    CHECK(digits(fit.deviance, number(given["deviance"])) > 9);
    CHECK(digits(fit.pearson, number(given["pearson"])) > 9);
  }
}
