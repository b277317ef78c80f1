// engine/models/term_tests.hpp -- what each term is worth: deviance lost without it, and a joint test.
//
// The deviance without a term is that of the model refitted without it, all reduced models sharing
// their passes over the rows. A term is dropped alone: one that also stands inside a cross leaves the
// cross in place.
// Source: McCullagh and Nelder, Generalized Linear Models, 2nd ed. 1989, section 2.3.2 (analysis of
// deviance); Wald, Trans. Amer. Math. Soc. 54 (1943) 426.
// Checked by: tests/engine/models/term_tests_test.cpp.
#pragma once

#include <Eigen/Core>
#include <vector>

#include "engine/models/glm.hpp"

namespace countsel {

struct TermTest {
  std::size_t term;           ///< index into Design::terms
  double deviance_lost = 0;   ///< deviance without the term less deviance with it
  double deviance_share = 0;  ///< the same over the null deviance; NaN where that is 0
  double statistic = 0;       ///< NaN where there is none
  double df = 0;              ///< rank lost without the term
  double df_below = 0;        ///< residual df of an F; 0 for a chi-square
  double p_value = 0;         ///< NaN where df is 0
};

/// Deviance lost and likelihood-ratio test of every term, in the order of the terms. Each loss is right
/// to 1e-5 of itself or better, on up to 20,000 rows to 1e-10, beyond what the fit itself is right to.
std::vector<TermTest> likelihood_term_tests(const GlmFit& fit, const Work& work = {});
/// The same with F tests: (deviance lost / df) / dispersion against F(df, fit.df).
std::vector<TermTest> scaled_term_tests(const GlmFit& fit, double dispersion, const Work& work = {});
/// Replaces statistic and p-value in `tests` by the joint Wald test with this covariance. Where a term's
/// coefficients are not all finite, those that are make the test.
void wald_term_tests(const GlmFit& fit, const Eigen::MatrixXd& covariance, std::vector<TermTest>& tests);

}  // namespace countsel
