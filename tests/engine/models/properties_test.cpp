// tests/engine/models/properties_test.cpp -- what may not change a fit, and what must change it in a known
// way.
#include <doctest/doctest.h>

#include <cstring>
#include <numeric>

#include "engine/models/covariance.hpp"
#include "engine/models/term_tests.hpp"
#include "synthetic.hpp"

using namespace countsel;
using namespace countsel::cases;

namespace {

bool same_bytes(const Eigen::VectorXd& a, const Eigen::VectorXd& b) {
  return a.size() == b.size() && std::memcmp(a.data(), b.data(), sizeof(double) * a.size()) == 0;
}

}  // namespace

TEST_CASE("one worker or three: the same bytes") {
  const Synthetic table(60000);
  Work three;
  three.workers = threads(3);
  const GlmFit a = table.fit(), b = table.fit(three);
  CHECK(a.converged);
  CHECK(same_bytes(a.coefficients, b.coefficients));
  CHECK(same_bytes(a.errors, b.errors));
  CHECK(a.loglik == b.loglik);
  CHECK(a.deviance == b.deviance);
  CHECK(a.pearson == b.pearson);
  const auto tests_a = likelihood_term_tests(a), tests_b = likelihood_term_tests(b, three);
  for (std::size_t t = 0; t < tests_a.size(); ++t)
    CHECK(tests_a[t].deviance_lost == tests_b[t].deviance_lost);
  CHECK(same_bytes(robust_covariance(a, RobustKind::hc3).errors,
                   robust_covariance(b, RobustKind::hc3, three).errors));
}

TEST_CASE("the likelihood equations hold, with levels, crosses and levels times numbers") {
  const Synthetic table(3000);
  const GlmFit fit = table.fit();
  REQUIRE(fit.aliases.empty());
  const Design& design = table.design;
  // Each coefficient's column, times the residuals, sums to 0.
  std::vector<double> score(design.coefficients, 0), scale(design.coefficients, 0);
  for (std::size_t i = 0; i < table.count.size(); ++i) {
    std::vector<double> row(design.coefficients, 0);
    row[0] = 1;
    for (const TermColumns& term : design.terms)
      for (std::size_t c = 0; c < std::max<std::size_t>(1, term.combinations.size()); ++c) {
        bool in = true;
        for (std::size_t f = 0; f < term.factors.size(); ++f)
          in &= table.columns[term.factors[f]].codes[i] == term.combinations[c][f];
        for (std::size_t k = 0; in && k < term.products.size(); ++k) {
          double value = 1;
          for (const Feature& feature : term.products[k])
            value *= feature.at(table.columns[feature.column].numbers[i]);
          row[term.coefficient(c, k)] = value;
        }
      }
    double eta = 0;
    for (std::size_t k = 0; k < row.size(); ++k) eta += row[k] * fit.coefficients[k];
    const double mean = table.exposure[i] * std::exp(eta);
    for (std::size_t k = 0; k < row.size(); ++k) {
      score[k] += row[k] * (table.count[i] - mean);
      scale[k] += row[k] * mean;
    }
  }
  for (std::size_t k = 0; k < score.size(); ++k) CHECK(std::fabs(score[k]) < 1e-10 * std::fabs(scale[k]));
}

TEST_CASE("permuting rows, splitting a row, scaling exposure") {
  const Synthetic table(2000);
  const GlmFit fit = table.fit();
  {
    std::vector<std::size_t> order(2000);
    std::iota(order.begin(), order.end(), 0);
    std::shuffle(order.begin(), order.end(), std::mt19937_64(3));
    Synthetic other(1);
    const auto take = [&](auto& to, const auto& from) {
      to.clear();
      for (const std::size_t i : order) to.push_back(from[i]);
    };
    take(other.count, table.count), take(other.exposure, table.exposure), take(other.age, table.age);
    take(other.pressure, table.pressure), take(other.load, table.load);
    take(other.material, table.material), take(other.soil, table.soil);
    other.make(true);
    const GlmFit permuted = other.fit();
    CHECK(permuted.loglik == doctest::Approx(fit.loglik).epsilon(1e-13));
    // Levels come in another order; by name the coefficients are the same.
    for (const CoefficientRow& row : table.design.table)
      for (const CoefficientRow& match : other.design.table)
        if (row.coefficient && match.coefficient && row.name == match.name && row.level == match.level) {
          CHECK(permuted.coefficients[*match.coefficient] ==
                doctest::Approx(fit.coefficients[*row.coefficient]).epsilon(1e-9));
          CHECK(permuted.errors[*match.coefficient] ==
                doctest::Approx(fit.errors[*row.coefficient]).epsilon(1e-9));
        }
  }
  {
    // Exposure and count shared out over two equal rows: the same likelihood but for constants.
    Synthetic other(1);
    const auto twice = [](auto& to, const auto& from) {
      to = from;
      to.insert(to.end(), from.begin(), from.end());
    };
    twice(other.count, table.count), twice(other.exposure, table.exposure), twice(other.age, table.age);
    twice(other.pressure, table.pressure), twice(other.load, table.load);
    twice(other.material, table.material), twice(other.soil, table.soil);
    for (std::size_t i = 0; i < 2000; ++i) {
      other.count[i] = std::floor(table.count[i] / 3);
      other.count[i + 2000] = table.count[i] - other.count[i];
      other.exposure[i] = 0.25 * table.exposure[i];
      other.exposure[i + 2000] = 0.75 * table.exposure[i];
    }
    other.make(true);
    const GlmFit split = other.fit();
    for (Eigen::Index k = 0; k < fit.coefficients.size(); ++k) {
      CHECK(split.coefficients[k] == doctest::Approx(fit.coefficients[k]).epsilon(1e-9));
      CHECK(split.errors[k] == doctest::Approx(fit.errors[k]).epsilon(1e-9));
    }
  }
  {
    Synthetic other(2000);
    for (double& e : other.exposure) e *= 1e6;
    other.make(true);
    const GlmFit scaled = other.fit();
    CHECK(scaled.coefficients[0] == doctest::Approx(fit.coefficients[0] - std::log(1e6)).epsilon(1e-12));
    for (Eigen::Index k = 1; k < fit.coefficients.size(); ++k)
      CHECK(scaled.coefficients[k] == doctest::Approx(fit.coefficients[k]).epsilon(1e-9));
    CHECK(scaled.deviance == doctest::Approx(fit.deviance).epsilon(1e-12));
    CHECK(scaled.null_deviance == doctest::Approx(fit.null_deviance).epsilon(1e-12));
  }
}

TEST_CASE("many rows give what few rows would: the sample only finds a start") {
  // 60,000 rows start from samples; the same rows condensed to weights start from the counts.
  Synthetic table(60000, false);
  const GlmFit fit = table.fit();
  CHECK(fit.converged);
  const std::vector<double> ones(60000, 1.0);
  const GlmFit weighted =
      fit_poisson(table.design, {table.count, table.exposure, {}, ones, WeightsAre::frequency});
  CHECK(weighted.coefficients[1] == doctest::Approx(fit.coefficients[1]).epsilon(1e-12));
  CHECK(fit.iterations <= 5);
}

TEST_CASE("a cancelled fit stops") {
  const Synthetic table(20000);
  Work work;
  std::atomic<int> asked{0};
  work.progress.asked = [&] {
    if (++asked > 3) throw Refusal(Code::cancelled, "cancelled");
  };
  CHECK_THROWS_AS(table.fit(work), Refusal);
}

TEST_CASE("what may not be fitted is refused with its row") {
  const std::vector<double> x = {1, 2, 3}, good = {1, 2, 3};
  const std::vector<SourceColumn> columns = {{"x", x, {}, nullptr, std::nullopt}};
  const std::vector<Term> terms = {slope_of(0)};
  const Design design = make_design(columns, terms, 3);
  const auto refused = [&](const GlmData& data) {
    try {
      fit_poisson(design, data);
    } catch (const Refusal& refusal) {
      return std::pair(refusal.code, refusal.places.empty() ? 0 : refusal.places[0].row);
    }
    return std::pair(Code::internal, std::int64_t{-1});
  };
  const std::vector<double> negative = {1, -1, 3}, broken = {1, 2.5, 3}, missing = {1, 2, NAN},
                            zero = {0, 1, 1};
  const std::vector<double> none = {0, 0, 0}, infinite = {1, 2, INFINITY}, few = {1, 2};
  using Row = std::pair<Code, std::int64_t>;
  CHECK(refused({negative, {}, {}, {}, {}}) == Row{Code::bad_count, 2});
  CHECK(refused({broken, {}, {}, {}, {}}) == Row{Code::bad_count, 2});
  CHECK(refused({missing, {}, {}, {}, {}}) == Row{Code::bad_count, 3});
  CHECK(refused({good, zero, {}, {}, {}}) == Row{Code::bad_exposure, 1});
  CHECK(refused({good, {}, {}, negative, {}}) == Row{Code::bad_value, 2});
  CHECK(refused({good, {}, {}, none, {}}) == Row{Code::too_few, 0});
  CHECK(refused({few, {}, {}, {}, {}}) == Row{Code::length_mismatch, 0});
  const std::vector<SourceColumn> wild = {{"x", infinite, {}, nullptr, std::nullopt}};
  const Design wild_design = make_design(wild, terms, 3);
  CHECK_THROWS_AS(fit_poisson(wild_design, {good, {}, {}, {}, {}}), Refusal);
}
