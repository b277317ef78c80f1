// tests/engine/models/covariance_test.cpp -- robust, clustered and scaled errors against 60-digit values.
#include "engine/models/covariance.hpp"

#include <doctest/doctest.h>

#include "cases.hpp"

using namespace countsel;
using namespace countsel::cases;

namespace {

void check_errors(const Ready& ready, const Json& names, const Json& expected, const Covariance& got) {
  for (std::size_t i = 0; i < names.size(); ++i) {
    CAPTURE(names[i]);
    CHECK(digits(got.errors[ready.coefficient_of.at(names[i])], number(expected[i])) > 9);
  }
}

}  // namespace

TEST_CASE("robust, clustered and scaled errors of the published fits") {
  for (const Json& given : read_json("poisson_cases.json")) {
    const std::string id = given["id"];
    CAPTURE(id);
    Ready ready;
    make_ready(ready, given);
    const GlmFit fit = fit_poisson(ready.design, ready.data);
    const Json& expected = given["recomputed"];
    const Json& names = expected["names"];
    if (expected.contains("HC0_se")) {
      check_errors(ready, names, expected["HC0_se"], robust_covariance(fit, RobustKind::hc0));
      check_errors(ready, names, expected["HC1_se"], robust_covariance(fit, RobustKind::hc1));
      check_errors(ready, names, expected["HC2_se"], robust_covariance(fit, RobustKind::hc2));
      check_errors(ready, names, expected["HC3_se"], robust_covariance(fit, RobustKind::hc3));
      const Covariance plain = robust_covariance(fit, RobustKind::hc0);
      for (std::size_t i = 0; i < names.size(); ++i)
        for (std::size_t j = 0; j < names.size(); ++j) {
          const auto k = ready.coefficient_of.at(names[i]), l = ready.coefficient_of.at(names[j]);
          CHECK(digits(plain.matrix(k, l), number(expected["HC0_cov"][i][j]),
                       1e-3 * plain.errors[k] * plain.errors[l]) > 8);
        }
    }
    if (expected.contains("cluster")) {
      const Json& cluster = expected["cluster"];
      const Covariance plain = clustered_covariance(fit, ready.cluster, ClusterKind::cr0);
      CHECK(plain.clusters == cluster["G"].get<std::size_t>());
      check_errors(ready, names, cluster["CR0_se"], plain);
      check_errors(ready, names, cluster["CR1_se"],
                   clustered_covariance(fit, ready.cluster, ClusterKind::cr1));
    }
    if (expected.contains("quasi"))
      check_errors(ready, names, expected["quasi"]["se"], scaled_covariance(fit));
  }
}

TEST_CASE("the hard cases: leverage 1, no degrees of freedom, clusters of one row") {
  std::size_t seen = 0;
  for (const Json& given : read_json("hard_cases.json")) {
    Ready ready;
    make_ready(ready, given);
    const std::string id = given["id"];
    CAPTURE(id);
    const Json& expected = given["expected"];
    if (id == "h_singleton_category") {
      const GlmFit fit = fit_poisson(ready.design, ready.data);
      check_errors(ready, expected["names"], expected["HC0_se"], robust_covariance(fit, RobustKind::hc0));
      check_errors(ready, expected["names"], expected["HC1_se"], robust_covariance(fit, RobustKind::hc1));
      for (const RobustKind kind : {RobustKind::hc2, RobustKind::hc3}) {
        const Covariance none = robust_covariance(fit, kind);
        CHECK(none.undefined_rows == 1);
        CHECK(std::isnan(none.errors[0]));
      }
      ++seen;
    }
    if (id == "h_one_row" || id == "h_saturated_two_rows") {
      const GlmFit fit = fit_poisson(ready.design, ready.data);
      CHECK(std::isnan(robust_covariance(fit, RobustKind::hc1).errors[0]));
      CHECK(std::isnan(robust_covariance(fit, RobustKind::hc3).errors[0]));
      CHECK(std::isnan(scaled_covariance(fit).errors[0]));
      const std::vector<std::int32_t> one(ready.count.size(), 0);
      CHECK(std::isnan(clustered_covariance(fit, one, ClusterKind::cr1).errors[0]));
      CHECK(clustered_covariance(fit, one, ClusterKind::cr0).errors[0] == doctest::Approx(0).epsilon(1e-6));
      ++seen;
    }
    if (id == "h_cluster_each_row") {
      const GlmFit fit = fit_poisson(ready.design, ready.data);
      check_errors(ready, expected["names"], expected["HC0_se"], robust_covariance(fit, RobustKind::hc0));
      check_errors(ready, expected["names"], expected["cluster"]["CR0_se"],
                   clustered_covariance(fit, ready.cluster, ClusterKind::cr0));
      check_errors(ready, expected["names"], expected["cluster"]["CR1_se"],
                   clustered_covariance(fit, ready.cluster, ClusterKind::cr1));
      ++seen;
    }
    if (id == "h_alias_exact") {
      const GlmFit fit = fit_poisson(ready.design, ready.data);
      const Json& part = expected["reduced_model"];
      check_errors(ready, part["names"], part["HC0_se"], robust_covariance(fit, RobustKind::hc0));
      check_errors(ready, part["names"], part["HC1_se"], robust_covariance(fit, RobustKind::hc1));
      check_errors(ready, part["names"], part["HC3_se"], robust_covariance(fit, RobustKind::hc3));
      CHECK(std::isnan(robust_covariance(fit, RobustKind::hc0).errors[2]));
      ++seen;
    }
  }
  CHECK(seen == 5);
}

TEST_CASE("frequency weights are repeated rows, precision weights are not") {
  const std::vector<double> x = {0, 1, 2, 3, 4, 5}, y = {1, 0, 4, 3, 9, 6}, w = {2, 1, 3, 1, 2, 1};
  std::vector<double> long_x, long_y;
  for (std::size_t i = 0; i < x.size(); ++i)
    for (int k = 0; k < static_cast<int>(w[i]); ++k) {
      long_x.push_back(x[i]);
      long_y.push_back(y[i]);
    }
  const std::vector<SourceColumn> short_columns = {{"x", x, {}, nullptr, std::nullopt}};
  const std::vector<SourceColumn> long_columns = {{"x", long_x, {}, nullptr, std::nullopt}};
  const std::vector<Term> terms = {slope_of(0)};
  const Design a = make_design(short_columns, terms, x.size()),
               b = make_design(long_columns, terms, long_x.size());
  const GlmFit weighted = fit_poisson(a, {y, {}, {}, w, WeightsAre::frequency});
  const GlmFit repeated = fit_poisson(b, {long_y, {}, {}, {}, WeightsAre::frequency});
  CHECK(weighted.df == repeated.df);
  CHECK(weighted.pearson == doctest::Approx(repeated.pearson).epsilon(1e-12));
  for (const RobustKind kind : {RobustKind::hc0, RobustKind::hc1, RobustKind::hc2, RobustKind::hc3})
    CHECK(robust_covariance(weighted, kind).errors[1] ==
          doctest::Approx(robust_covariance(repeated, kind).errors[1]).epsilon(1e-11));
  const GlmFit precise = fit_poisson(a, {y, {}, {}, w, WeightsAre::precision});
  CHECK(precise.df == 4);
  CHECK(precise.coefficients[1] == doctest::Approx(weighted.coefficients[1]).epsilon(1e-12));
  CHECK(robust_covariance(precise, RobustKind::hc0).errors[1] !=
        doctest::Approx(robust_covariance(weighted, RobustKind::hc0).errors[1]));
}
