// engine/rates/dispersion_tests.cpp -- the index of dispersion and both its tails.
#include "engine/rates/dispersion_tests.hpp"

#include <algorithm>
#include <cmath>
#include <limits>

#include "engine/numbers/distributions.hpp"
#include "engine/numbers/sums.hpp"

namespace countsel {

DispersionTest dispersion_test(const CountRows& rows) {
  require_count_rows(rows);
  constexpr double nan = std::numeric_limits<double>::quiet_NaN();
  const CountTotals totals = count_totals(rows);
  DispersionTest test{totals.events / totals.rows, nan, nan, totals.rows - 1, nan, nan, nan, nan};
  if (test.df < 1) return test;
  const double rate = totals.events / totals.exposure;
  Sum squares, statistic;
  for (std::size_t i = 0; i < rows.size(); ++i) {
    if (rows.seen(i) == 0) continue;
    const double from_mean = rows.counts[i] - test.mean;
    const double expected = rate * rows.exposure(i);
    const double from_expected = rows.counts[i] - expected;
    squares.add(rows.seen(i) * from_mean * from_mean);
    statistic.add(rows.seen(i) * from_expected * (from_expected / expected));
  }
  test.variance = squares.value() / test.df;
  if (totals.events == 0) return test;
  test.statistic = statistic.value();
  test.dispersion = test.statistic / test.df;
  test.p_above = chi_square_above(test.statistic, test.df);
  test.p_below = chi_square_below(test.statistic, test.df);
  test.p_either = std::min(1.0, 2 * std::min(test.p_above, test.p_below));
  return test;
}

double smallest_expected(const CountRows& rows) {
  const CountTotals totals = count_totals(rows);
  double least = std::numeric_limits<double>::infinity();
  for (std::size_t i = 0; i < rows.size(); ++i)
    if (rows.seen(i) > 0) least = std::min(least, rows.exposure(i));
  return least * (totals.events / totals.exposure);
}

}  // namespace countsel
