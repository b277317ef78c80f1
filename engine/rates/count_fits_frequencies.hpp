// engine/rates/count_fits_frequencies.hpp -- how often each value was seen, beside how often it should have
// been.
//
// What is expected at a value is summed over the rows, each with its own exposure, so that one large exposure
// is not mistaken for a heavy tail. The test of fit pools thin classes after Cochran.
// Source: Pearson 1900; Cochran 1954, Biometrics 10, 417-451 (pooling).
// Checked by: tests/engine/rates/count_fits_frequencies_test.cpp, tests/reference/rates/count_fits.tsv.
#pragma once

#include <vector>

#include "engine/rates/count_fits.hpp"
#include "engine/rates/count_fits_rows.hpp"
#include "engine/work.hpp"

namespace countsel {

/// Numbers of rows, seen and expected, with counts from value to value + width - 1.
struct FrequencyTable {
  double width;  ///< 1 unless the counts range over more than 400 values
  std::vector<double> value, observed, poisson, negative_binomial;
  // Rows expected below the first value and above the last class.
  double poisson_below, poisson_above, negative_binomial_below, negative_binomial_above;
};

/// From 0, or from the least count where that is above 30, to the greatest count.
/// poisson, negative_binomial: fits to these rows; only their rates and the latter's spread are read.
/// Beyond 2,000 different exposures, neighbours are taken together (expected numbers then hold to
/// about four digits).
FrequencyTable frequency_table(const CountRows& rows, const CountFit& poisson,
                               const CountFit& negative_binomial, const Work& work = {});

/// A class of the test of fit: counts from `from` to `to`, the last `to` +infinity.
struct FitClass {
  double from, to, observed, expected;
};

/// Pearson's statistic over the pooled classes, on classes - 2 degrees of freedom (one for the rate). NaN
/// where fewer than three classes are left.
struct GoodnessOfFit {
  double statistic, df, p_value;
  std::vector<FitClass> classes;
};

/// Pools the table's classes from below until each expects 5 rows; the first and the last need expect only 1.
GoodnessOfFit poisson_fit(const FrequencyTable& table);

}  // namespace countsel
