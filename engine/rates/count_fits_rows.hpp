// engine/rates/count_fits_rows.hpp -- rows of counts as the count distributions' fits and tests take them.
//
// One row may stand for many: `times` is how often it was seen, so that a frequency table is the same data
// as its rows written out, to the last digit of every test.
// Checked by: tests/engine/rates/count_fits_test.cpp.
#pragma once

#include <cstddef>
#include <span>
#include <vector>

namespace countsel {

/// n rows. counts whole and 0 or more; exposures above 0, empty for 1 each; times whole and 0 or more,
/// empty for 1 each.
struct CountRows {
  std::span<const double> counts, exposures, times;

  std::size_t size() const { return counts.size(); }
  double exposure(std::size_t i) const { return exposures.empty() ? 1 : exposures[i]; }
  double seen(std::size_t i) const { return times.empty() ? 1 : times[i]; }
};

/// Sums over the rows as often as they were seen.
struct CountTotals {
  double rows, events, exposure, zeros, most;  ///< most: the greatest count
};

/// Refuses bad_count (counts, times), bad_exposure, length_mismatch, too_few (no rows, or none seen), naming
/// the places by the roles count, exposure, times.
void require_count_rows(const CountRows& rows);
CountTotals count_totals(const CountRows& rows);

/// Rows of one count and one exposure put together, by rising exposure, then count; rows never seen are left
/// out.
struct CountPatterns {
  std::vector<double> counts, exposures, times;

  CountRows rows() const { return {counts, exposures, times}; }
};
CountPatterns condense_count_rows(const CountRows& rows);

}  // namespace countsel
