// engine/numbers/distributions.hpp -- tails and quantiles, the one door to Boost.Math.
//
// Every probability is offered as both tails, so that a small one is never made by subtraction from
// one. One policy: double without promotion to long double, errors as values (NaN or infinity).
// Each is right to 12 digits for shapes and counts to 1e9 and tails to 1e-300, which Boost alone is not.
// Source: Boost.Math 1.74 special functions; engine/numbers/large_shapes.hpp; identities as noted.
// Checked by: tests/engine/numbers/distributions_test.cpp, tests/reference/numbers/distributions.tsv.
#pragma once

#include "engine/numbers/share.hpp"

namespace countsel {

// Standard normal.
double normal_below(double z);           ///< P(Z <= z)
double normal_above(double z);           ///< P(Z > z)
double normal_quantile(double p);        ///< z with P(Z <= z) = p, 0 < p < 1
double normal_upper_quantile(double q);  ///< z with P(Z > z) = q, 0 < q < 1

// Gamma with shape a > 0 and rate 1, at x >= 0.
double gamma_below(double a, double x);           ///< P(a, x)
double gamma_above(double a, double x);           ///< Q(a, x)
double gamma_density(double a, double x);         ///< x^(a-1) e^-x / Gamma(a)
double gamma_quantile(double a, double p);        ///< x with P(a, x) = p
double gamma_upper_quantile(double a, double q);  ///< x with Q(a, x) = q
double log_gamma(double x);                       ///< log Gamma(x), x > 0
double digamma(double x);
double trigamma(double x);

// Poisson with mean mu >= 0; k whole.
double poisson_at_most(double k, double mu);   ///< P(X <= k); 0 for k < 0
double poisson_at_least(double k, double mu);  ///< P(X >= k); 1 for k <= 0
double poisson_exactly(double k, double mu);   ///< P(X = k)

// Beta with a, b > 0 at x in [0, 1].
double beta_below(double a, double b, double x);
double beta_above(double a, double b, double x);
double beta_density(double a, double b, double x);
Tails beta_tails(double a, double b, const Share& share);       ///< both, at part : rest
double beta_quantile_odds(double a, double b, double p);        ///< x / (1 - x) at beta_quantile
double beta_upper_quantile_odds(double a, double b, double q);  ///< x / (1 - x) at beta_upper_quantile
double beta_quantile(double a, double b, double p);             ///< x with I_x(a, b) = p
double beta_upper_quantile(double a, double b, double q);       ///< x with 1 - I_x(a, b) = q

// Binomial of n trials with chance p; k whole.
double binomial_at_most(double k, double n, double p);
double binomial_at_least(double k, double n, double p);
double binomial_exactly(double k, double n, double p);
double binomial_at_most(double k, double n, const Share& share);
double binomial_at_least(double k, double n, const Share& share);
double binomial_exactly(double k, double n, const Share& share);

// Chi-square, Student's t, F.
double chi_square_below(double x, double df);
double chi_square_above(double x, double df);
double chi_square_upper_quantile(double q, double df);
double student_above(double t, double df);
double student_upper_quantile(double q, double df);
double f_above(double f, double df1, double df2);
double f_upper_quantile(double q, double df1, double df2);

}  // namespace countsel
