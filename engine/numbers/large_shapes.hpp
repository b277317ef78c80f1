// engine/numbers/large_shapes.hpp -- gamma and beta tails where the shapes are large.
//
// Far out in a tail at 1e9 events, general routines lose five digits: they multiply large powers. Here the
// density is written through deviances, which are small where the density matters, and the
// tail is the density times an integral of ratios over a few Gauss-Legendre panels, all positive.
// Source: Loader 2000, Fast and accurate computation of binomial probabilities (the density); the tail as
//   an integral of f(x + s) / f(x), derived beside it; Abramowitz and Stegun 1964, 26.5.4.
// Checked by: tests/engine/numbers/distributions_test.cpp against mpmath series.
#pragma once

#include "engine/numbers/share.hpp"

namespace countsel {

/// u - log(1 + u) for u > -1, to a few units in the last place also near 0.
double log1p_gap(double u);

/// ratio - 1 - log(ratio) for ratio > 0, given ratio - 1 without its rounding as well: a deviance over its
/// count.
double ratio_gap(double ratio, double less_one);

/// log Gamma(a + 1) less Stirling's (a + 1/2) log a - a + log sqrt(2 pi), a > 0; absolute error 1e-15.
double stirling_error(double a);

/// x^a e^-x / Gamma(a): x times the gamma density. a > 0, x > 0.
double gamma_front(double a, double x);

/// Both tails of a gamma of shape a at x > 0. For a of some hundreds or more: cost about 1 us.
Tails large_gamma_tails(double a, double x);

/// x^a y^b / B(a, b) at the share x : y; x y times the beta density.
double beta_front(double a, double b, const Share& share);

/// Both tails of a beta at the share. Right for all a, b of 0.5 or more; meant for a large one.
Tails large_beta_tails(double a, double b, const Share& share);

}  // namespace countsel
