// tests/engine/models/separation_test.cpp -- separated rows and infinite coefficients against linear
// programmes.
#include "engine/models/separation.hpp"

#include <doctest/doctest.h>

#include "cases.hpp"

using namespace countsel;
using namespace countsel::cases;

namespace {

struct Numeric {
  std::vector<std::vector<double>> store;
  std::vector<SourceColumn> columns;
  std::vector<Term> terms;
  std::vector<double> count;
  Design design;

  Numeric(std::vector<std::vector<double>> values, std::vector<double> counts)
      : store(std::move(values)), count(std::move(counts)) {
    for (std::size_t j = 0; j < store.size(); ++j) {
      columns.push_back({"x" + std::to_string(j), store[j], {}, nullptr, std::nullopt});
      terms.push_back(slope_of(j));
    }
    design = make_design(columns, terms, count.size());
  }
  GlmFit fit() const { return fit_poisson(design, {count, {}, {}, {}, WeightsAre::frequency}); }
};

const std::map<std::string, CoefficientStatus> fates = {{"finite", CoefficientStatus::finite},
                                                        {"minus", CoefficientStatus::minus_infinity},
                                                        {"plus", CoefficientStatus::plus_infinity},
                                                        {"undetermined", CoefficientStatus::undetermined}};

}  // namespace

TEST_CASE("400 small designs: the rows and coefficients that a linear programme finds") {
  int number_of_case = 0;
  for (const Json& given : read_json("separation_cases.json")) {
    CAPTURE(number_of_case++);
    std::vector<std::vector<double>> values;
    for (const Json& column : given["columns"]) values.push_back(numbers(column));
    const Numeric numeric(values, numbers(given["count"]));
    const GlmFit fit = numeric.fit();
    CHECK(fit.converged);
    CHECK(fit.separated_rows == given["separated"].get<std::vector<std::size_t>>());
    const auto kept = given["kept"].get<std::vector<std::size_t>>();
    CHECK(fit.rank == kept.size());
    std::vector<CoefficientStatus> expected(numeric.design.coefficients, CoefficientStatus::aliased);
    for (std::size_t i = 0; i < kept.size(); ++i) expected[kept[i]] = fates.at(given["fate"][i]);
    for (std::size_t k = 0; k < expected.size(); ++k) {
      CAPTURE(k);
      CHECK(fit.status[k] == expected[k]);
      CHECK(std::isfinite(fit.coefficients[k]) == (expected[k] == CoefficientStatus::finite));
    }
  }
}

TEST_CASE("the fit without the separated rows stands") {
  // Rows with x0 > x1 have no events: x1 - x0 rises without end, their rate goes to 0.
  const std::vector<double> x0 = {0, 1, 2, 3, 1, 2, 3, 3}, x1 = {0, 1, 2, 3, 0, 1, 1, 2};
  const std::vector<double> y = {2, 1, 4, 7, 0, 0, 0, 0};
  const GlmFit fit = Numeric({x0, x1}, y).fit();
  CHECK(fit.separated_rows == std::vector<std::size_t>{4, 5, 6, 7});
  CHECK(fit.status[0] == CoefficientStatus::finite);
  CHECK(fit.status[1] == CoefficientStatus::minus_infinity);
  CHECK(fit.status[2] == CoefficientStatus::plus_infinity);
  const GlmFit rest = Numeric({{0, 1, 2, 3}}, {2, 1, 4, 7}).fit();
  CHECK(fit.coefficients[0] == doctest::Approx(rest.coefficients[0]).epsilon(1e-12));
  CHECK(fit.errors[0] == doctest::Approx(rest.errors[0]).epsilon(1e-12));
  CHECK(fit.loglik == doctest::Approx(rest.loglik).epsilon(1e-13));
  CHECK(fit.deviance == doctest::Approx(rest.deviance).epsilon(1e-12));
  CHECK(fit.rows == 8);
}

TEST_CASE("near-separation is not separation") {
  // One event among the rows that would be separated, at a rate far below the others.
  const std::vector<double> x = {0, 0, 0, 0, 1, 1, 1, 1};
  std::vector<double> y = {1e6, 1e6, 1e6, 1e6, 0, 0, 0, 1};
  const GlmFit fit = Numeric({x}, y).fit();
  CHECK(fit.separated_rows.empty());
  CHECK(fit.coefficients[1] == doctest::Approx(std::log(0.25 / 1e6)).epsilon(1e-12));
  CHECK(fit.errors[1] == doctest::Approx(std::sqrt(1 + 1 / 4e6)).epsilon(1e-9));
}

TEST_CASE("a reference without events sends the baseline down and the others up") {
  const std::vector<std::string> names = {"A", "B", "C"};
  const std::vector<std::int32_t> codes = {0, 0, 1, 1, 2, 2};
  const std::vector<double> x = {1, 2, 1, 3, 2, 4}, y = {0, 0, 3, 5, 4, 9};
  const std::vector<SourceColumn> columns = {{"g", {}, codes, &names, "A"},
                                             {"x", x, {}, nullptr, std::nullopt}};
  const std::vector<Term> terms = {levels_of(0), slope_of(1)};
  const Design design = make_design(columns, terms, 6);
  const GlmFit fit = fit_poisson(design, {y, {}, {}, {}, WeightsAre::frequency});
  CHECK(fit.status == std::vector{CoefficientStatus::minus_infinity, CoefficientStatus::plus_infinity,
                                  CoefficientStatus::plus_infinity, CoefficientStatus::finite});
  CHECK(fit.separated_rows == std::vector<std::size_t>{0, 1});
}

TEST_CASE("what is left of a target after nonnegative least squares") {
  Eigen::MatrixXd columns(2, 3);
  columns << 1, 0, 1, 0, 1, 1;
  const Eigen::VectorXd inside = nonnegative_remainder(columns, Eigen::Vector2d(3, 5), {});
  CHECK(inside.norm() < 1e-12);
  const Eigen::VectorXd outside = nonnegative_remainder(columns, Eigen::Vector2d(3, -4), {});
  CHECK(outside[0] == doctest::Approx(0));
  CHECK(outside[1] == doctest::Approx(-4));
}

TEST_CASE("thousands of levels without events cost no more than the rows") {
  const std::size_t levels = 5000, rows = 4 * levels;
  std::vector<std::string> names;
  std::vector<std::int32_t> codes;
  std::vector<double> x, y;
  for (std::size_t l = 0; l < levels; ++l) names.push_back("ward " + std::to_string(l));
  for (std::size_t i = 0; i < rows; ++i) {
    codes.push_back(static_cast<std::int32_t>(i % levels));
    x.push_back(static_cast<double>(i % 7));
    y.push_back(i % levels % 3 == 0 ? 0.0 : static_cast<double>(1 + i % 7 % 3));
  }
  const std::vector<SourceColumn> columns = {{"ward", {}, codes, &names, "ward 1"},
                                             {"x", x, {}, nullptr, std::nullopt}};
  const std::vector<Term> terms = {levels_of(0), slope_of(1)};
  const Design design = make_design(columns, terms, rows);
  const GlmFit fit = fit_poisson(design, {y, {}, {}, {}, WeightsAre::frequency});
  CHECK(fit.converged);
  std::size_t infinite = 0;
  for (const auto status : fit.status) infinite += status == CoefficientStatus::minus_infinity;
  CHECK(infinite == 1667);
  CHECK(fit.separated_rows.size() == 1667 * 4);
  CHECK(fit.covariance.size() == 0);
  // Each finite level's fitted sum is its count: the likelihood equations.
  double fitted = 0, seen = 0;
  for (std::size_t i = 2; i < rows; i += levels) {
    const std::size_t k = *design.table[3].coefficient;
    CHECK(design.table[3].level == "ward 2");
    fitted += std::exp(fit.coefficients[0] + fit.coefficients[k] + fit.coefficients[levels] * x[i]);
    seen += y[i];
  }
  CHECK(fitted == doctest::Approx(seen).epsilon(1e-10));
}
