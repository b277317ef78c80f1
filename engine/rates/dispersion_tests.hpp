// engine/rates/dispersion_tests.hpp -- do counts vary as much as chance makes them vary: more, or less?
//
// The index of dispersion: the squared distances of the counts from what their exposures lead one to
// expect, each over its expectation. Poisson counts make it nearly chi-square; too much points to
// clusters or mixed rates, too little to counts that hold each other back.
// Source: Fisher, Thornton and Mackenzie 1922, Ann. Appl. Biol. 9; Hoel 1943, Ann. Math. Stat. 14.
// Checked by: tests/engine/rates/dispersion_tests_test.cpp, tests/reference/rates/count_fits.tsv.
#pragma once

#include "engine/rates/count_fits_rows.hpp"

namespace countsel {

/// NaN: no value (a single row; for all but mean and variance also no events).
struct DispersionTest {
  double mean, variance;    ///< of the counts as they stand; variance over rows - 1
  double statistic, df;     ///< the index of dispersion, rows - 1
  double dispersion;        ///< statistic / df; with equal exposures variance / mean
  double p_above, p_below;  ///< chance of a statistic as large, as small, from Poisson counts
  double p_either;          ///< twice the smaller, at most 1
};

/// Rows with times count as often as they were seen. Refuses what require_count_rows refuses.
/// Chi-square is an approximation that wants expected counts of some size (Cochran 1954: not many below
/// 1); `smallest_expected` lets the caller say so.
DispersionTest dispersion_test(const CountRows& rows);

/// The least expected count of any row at the common rate.
double smallest_expected(const CountRows& rows);

}  // namespace countsel
