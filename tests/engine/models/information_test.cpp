// tests/engine/models/information_test.cpp -- factors and inverses, with and without an absorbed level
// column.
#include "engine/models/information.hpp"

#include <doctest/doctest.h>

#include <Eigen/LU>
#include <random>

#include "engine/models/factor.hpp"
#include "engine/models/fitted.hpp"
#include "synthetic.hpp"

using namespace countsel;
using namespace countsel::cases;
using Eigen::Index;
using Eigen::MatrixXd;
using Eigen::VectorXd;

namespace {

MatrixXd drawn(Index rows, Index columns, unsigned seed) {
  std::mt19937_64 random(seed);
  std::normal_distribution<double> normal;
  return MatrixXd::NullaryExpr(rows, columns, [&] { return normal(random); });
}

}  // namespace

TEST_CASE("an arrow-shaped matrix is solved and inverted like a full one") {
  const Index rest = 4, absorbed = 6;
  Information information;
  for (std::size_t k = 0; k < 10; ++k)
    (k % 2 == 0 && k < 8 ? information.rest : information.absorbed).push_back(k);
  information.full = drawn(rest, rest, 1);
  information.full =
      (information.full * information.full.transpose()).eval() + 20 * MatrixXd::Identity(rest, rest);
  information.border = drawn(rest, absorbed, 2);
  information.diagonal = VectorXd::LinSpaced(absorbed, 1, 3);
  MatrixXd whole = MatrixXd::Zero(10, 10);
  for (Index i = 0; i < rest; ++i) {
    for (Index j = 0; j < rest; ++j) whole(information.rest[i], information.rest[j]) = information.full(i, j);
    for (Index j = 0; j < absorbed; ++j)
      whole(information.rest[i], information.absorbed[j]) =
          whole(information.absorbed[j], information.rest[i]) = information.border(i, j);
  }
  for (Index j = 0; j < absorbed; ++j)
    whole(information.absorbed[j], information.absorbed[j]) = information.diagonal[j];
  const Factor factor = factorise(information, 10, 1e-7);
  CHECK(factor.dependent.empty());
  const MatrixXd expected = whole.inverse();
  CHECK((inverse(factor) - expected).norm() < 1e-13 * expected.norm());
  CHECK((inverse_diagonal(factor) - expected.diagonal()).norm() < 1e-13);
  const VectorXd score = drawn(10, 1, 3);
  CHECK((solve(factor, score) - expected * score).norm() < 1e-13);
  CHECK((times(information, score) - whole * score).norm() < 1e-12);
  std::vector<char> dropped(10, 0);
  dropped[2] = dropped[9] = 1;
  const Information smaller = without(information, dropped);
  CHECK(smaller.rest.size() == 3);
  CHECK(smaller.absorbed.size() == 5);
  CHECK(smaller.diagonal[4] == information.diagonal[4]);
}

TEST_CASE("an explained column is left out, later ones stay") {
  MatrixXd x = drawn(30, 5, 4);
  x.col(2) = x.col(0) - 2 * x.col(1);
  Information information;
  information.rest = {0, 1, 2, 3, 4};
  information.full = x.transpose() * x;
  information.border.resize(5, 0);
  const Factor factor = factorise(information, 5, 1e-7);
  CHECK(factor.dependent == std::vector<std::size_t>{2});
  const VectorXd explained = regress(factor, information, 2);
  CHECK((explained - (VectorXd(5) << 1, -2, 0, 0, 0).finished()).norm() < 1e-12);
  MatrixXd kept(30, 4);
  kept << x.col(0), x.col(1), x.col(3), x.col(4);
  const MatrixXd expected = (kept.transpose() * kept).inverse();
  CHECK(std::fabs(inverse(factor)(4, 4) - expected(3, 3)) < 1e-13);
  CHECK(inverse(factor).col(2).norm() == 0);
}

TEST_CASE("many levels: absorbed or not, the same fit") {
  // 300 levels are absorbed; the same levels as two crossed columns of 15 and 20 are not.
  const std::size_t rows = 6000;
  std::vector<std::string> fine, tens, units;
  for (int l = 0; l < 300; ++l) fine.push_back(std::to_string(l));
  for (int l = 0; l < 15; ++l) tens.push_back(std::to_string(l));
  for (int l = 0; l < 20; ++l) units.push_back(std::to_string(l));
  std::vector<std::int32_t> fine_code, ten_code, unit_code;
  std::vector<double> x, y;
  std::mt19937_64 random(5);
  for (std::size_t i = 0; i < rows; ++i) {
    const auto code = static_cast<std::int32_t>(i < 300 ? i : random() % 300);
    fine_code.push_back(code);
    ten_code.push_back(code / 20);
    unit_code.push_back(code % 20);
    x.push_back(std::normal_distribution<double>()(random));
    y.push_back(1 + std::poisson_distribution<int>(std::exp(0.5 * x[i] + code % 7 * 0.2))(random));
  }
  const std::vector<SourceColumn> columns = {{"fine", {}, fine_code, &fine, "0"},
                                             {"tens", {}, ten_code, &tens, "0"},
                                             {"units", {}, unit_code, &units, "0"},
                                             {"x", x, {}, nullptr, std::nullopt}};
  const std::vector<Term> one = {levels_of(0), slope_of(3)};
  const std::vector<Term> two = {levels_of(1), levels_of(2), cross_of({levels_of(1), levels_of(2)}),
                                 slope_of(3)};
  const Design design_one = make_design(columns, one, rows), design_two = make_design(columns, two, rows);
  const GlmFit a = fit_poisson(design_one, {y, {}, {}, {}, WeightsAre::frequency});
  const GlmFit b = fit_poisson(design_two, {y, {}, {}, {}, WeightsAre::frequency});
  CHECK(a.model->factor.absorbed.size() == 299);
  CHECK(a.converged);
  CHECK(b.converged);
  CHECK(a.deviance == doctest::Approx(b.deviance).epsilon(1e-11));
  CHECK(a.coefficients[300] == doctest::Approx(b.coefficients[300]).epsilon(1e-11));
  CHECK(a.errors[300] == doctest::Approx(b.errors[300]).epsilon(1e-11));
  CHECK(a.errors[0] == doctest::Approx(b.errors[0]).epsilon(1e-10));
  CHECK(a.errors[5] == doctest::Approx(std::sqrt(a.covariance(5, 5))).epsilon(1e-12));
  const Eigen::VectorXd errors = design_errors(a.model->layout, a.model->basis, a.model->factor);
  for (Index k = 0; k < errors.size(); ++k) CHECK(errors[k] == doctest::Approx(a.errors[k]).epsilon(1e-10));
}
