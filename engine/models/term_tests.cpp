// engine/models/term_tests.cpp -- each term left out, the deviance it takes along, and joint tests.
#include "engine/models/term_tests.hpp"

#include <Eigen/Cholesky>
#include <algorithm>
#include <cmath>
#include <limits>

#include "engine/models/fitted.hpp"
#include "engine/models/reduced.hpp"
#include "engine/numbers/distributions.hpp"

namespace countsel {
namespace {

using Eigen::Index;
using Eigen::MatrixXd;
using Eigen::VectorXd;

constexpr double nan = std::numeric_limits<double>::quiet_NaN();

/// A term without which the same rows are separated, the same columns aliased and the working columns the
/// same.
bool stands_apart(const FittedModel& model, const TermColumns& term) {
  for (std::size_t k = term.first; k < term.first + term.size(); ++k)
    if (model.entangled[k]) return false;
  return true;
}

void test_by_deviance(TermTest& test) {
  test.statistic = test.df > 0 ? test.deviance_lost : nan;
  test.p_value = test.df > 0 ? chi_square_above(test.statistic, test.df) : nan;
}

}  // namespace

std::vector<TermTest> likelihood_term_tests(const GlmFit& fit, const Work& work) {
  const FittedModel& model = *fit.model;
  const std::size_t terms = model.design.terms.size();
  std::vector<TermTest> tests(terms);
  std::vector<std::size_t> together;
  std::vector<std::vector<char>> dropped;
  std::vector<char> by_refit(terms, 0);
  const bool shared = model.family->log_canonical && fit.converged && model.gamma.size() > 0;
  for (std::size_t t = 0; t < terms; ++t) {
    const TermColumns& term = model.design.terms[t];
    tests[t].term = t;
    if (term.size() == 0) continue;
    by_refit[t] = !shared || !stands_apart(model, term);
    if (by_refit[t]) continue;
    together.push_back(t);
    dropped.emplace_back(model.layout.coefficients, 0);
    std::fill_n(dropped.back().begin() + static_cast<std::ptrdiff_t>(term.first), term.size(), 1);
  }
  // Close calls cost little on few rows; on many the passes stop where the figures shown are settled.
  const double accuracy = model.data.rows <= 20000 ? 1e-10 : 1e-4;
  const auto lost = deviance_lost(model, dropped, accuracy, work);
  for (std::size_t m = 0; m < together.size(); ++m) {
    TermTest& test = tests[together[m]];
    by_refit[together[m]] = !lost[m].has_value();
    test.deviance_lost = lost[m].value_or(0);
    test.df = static_cast<double>(model.design.terms[together[m]].size());
  }
  for (std::size_t t = 0; t < terms; ++t) {
    if (by_refit[t] && model.gamma.size() > 0) {
      const GlmFit smaller = fit_poisson(without_term(model.design, t), model.source, work);
      tests[t].deviance_lost = std::max(0.0, smaller.deviance - fit.deviance);
      tests[t].df = static_cast<double>(fit.rank - smaller.rank);
    }
    tests[t].deviance_share = fit.null_deviance > 0 ? tests[t].deviance_lost / fit.null_deviance : nan;
    test_by_deviance(tests[t]);
  }
  return tests;
}

std::vector<TermTest> scaled_term_tests(const GlmFit& fit, double dispersion, const Work& work) {
  std::vector<TermTest> tests = likelihood_term_tests(fit, work);
  for (TermTest& test : tests) {
    const bool testable = test.df > 0 && fit.df > 0 && dispersion > 0;
    test.df_below = fit.df;
    test.statistic = testable ? test.deviance_lost / test.df / dispersion : nan;
    test.p_value = testable ? f_above(test.statistic, test.df, fit.df) : nan;
  }
  return tests;
}

void wald_term_tests(const GlmFit& fit, const MatrixXd& covariance, std::vector<TermTest>& tests) {
  for (TermTest& test : tests) {
    const TermColumns& term = fit.model->design.terms[test.term];
    std::vector<Index> finite;
    for (std::size_t k = term.first; k < term.first + term.size(); ++k)
      if (fit.status[k] == CoefficientStatus::finite) finite.push_back(static_cast<Index>(k));
    test.df = static_cast<double>(finite.size());
    test.df_below = 0;
    test.statistic = test.p_value = nan;
    if (finite.empty() || covariance.size() == 0) continue;
    // Scaled to unit variances first: coefficients of very different sizes then lose no digits.
    const MatrixXd block = covariance(finite, finite);
    const VectorXd scale = block.diagonal().cwiseSqrt().cwiseInverse();
    const VectorXd value = fit.coefficients(finite).cwiseProduct(scale);
    const Eigen::LDLT<MatrixXd> factor(scale.asDiagonal() * block * scale.asDiagonal());
    // Fewer clusters than coefficients leave the block without full rank: there is no joint test then.
    if (!block.allFinite() || factor.info() != Eigen::Success || !(factor.vectorD().minCoeff() > 1e-12))
      continue;
    test.statistic = value.dot(factor.solve(value));
    test.p_value = chi_square_above(test.statistic, test.df);
  }
}

}  // namespace countsel
