// engine/rates/zero_test.hpp -- are there more zeros than Poisson counts at these exposures would show?
//
// The score test of an added share of zeros: each row's zero, or its absence, is weighed by how rare a
// zero was there, so that a zero at a large exposure counts for much and one at a small exposure for little.
// Source: van den Broek 1995, Biometrics 51, 738-743, with the common rate as the only covariate.
// Checked by: tests/engine/rates/zero_test_test.cpp, tests/reference/rates/count_fits.tsv.
#pragma once

#include "engine/rates/count_fits_rows.hpp"

namespace countsel {

/// statistic is z squared, chi-square on 1 degree of freedom; z is above 0 for too many zeros.
/// p_either its tail; p_more the chance of so many zeros, one-sided. NaN where there are no events.
struct ZeroTest {
  double zeros, zeros_expected, z, statistic, p_either, p_more;
};

/// With mean_i the expected count of row i at the common rate, z is the sum of [count_i = 0] exp(mean_i) - 1
/// over the square root of the sum of exp(mean_i) - 1 - mean_i.
/// Refuses what require_count_rows refuses. A normal approximation: with fewer than some five expected
/// zeros it is rough.
ZeroTest zero_test(const CountRows& rows);

}  // namespace countsel
