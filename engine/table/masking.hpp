// engine/table/masking.hpp -- which counts to withhold so that no small one can be worked out.
//
// Counts under the threshold are withheld; so are as many others as it takes that no withheld count follows
// from the totals. The reader is taken to know the rule: that a small one is under the threshold and one
// withheld beside it is not. Safe means: each withheld count could still be at least two different
// numbers, with everything that is shown unchanged. Whatever else would give a count away (its rate, limits,
// ratio, p-value, fitted value, bar) must be withheld with it; exposures may be shown.
// Source: Cox 1980, J. Am. Statist. Ass. 75, 377-385 (complementary suppression); Gusfield 1988, SIAM J.
// Comput. 17, 552-571 (a count in a two-way table is safe when it lies on a cycle of withheld ones). Checked
// by: tests/engine/table/masking_test.cpp, which attacks what is shown by trying all tables.
#pragma once

#include <cstddef>
#include <span>
#include <vector>

namespace countsel {

/// small: under the threshold ("<k"); kept_back: not small, withheld to protect others.
enum class Shown { plain, small, kept_back };

/// One list with its total.
struct MaskedList {
  std::vector<Shown> counts;
  Shown total = Shown::plain;
  bool safe =
      true;  ///< false: even with all withheld a count could be worked out (a list that is all zeros, say)
};

/// Withholds in a list whose sum is shown (`total_shown`) or nowhere to be seen.
///   counts     n counts, whole, 0 or more
///   threshold  k, whole, 3 or more: "<2" would leave only 0 and 1, of which a total soon tells
/// The smallest counts are kept back first, and the reader is taken to know that too. Where all counts
/// together are not enough the total is kept back. Refuses bad_count, bad_value (threshold).
MaskedList mask_list(std::span<const double> counts, double threshold, bool total_shown);

/// A table with both margins and the grand total, rows by columns, row after row.
struct MaskedTable {
  std::vector<Shown> cells, row_totals, column_totals;
  Shown grand_total = Shown::plain;
  bool safe = true;
};

/// Withholds in a table whose margins are shown.
///   counts  rows x columns, row after row; NaN where there is no such cell (known to all, never withheld)
/// Kept back are few and small counts, margins only where nothing else will do, one cheapest cycle at a time
/// (not the least possible number, which is a hard problem). Refuses bad_count, bad_value (threshold as
/// above), length_mismatch, too_large (above 1e6 cells). Cost: cells x (rows + columns) at worst; 100 x 20
/// cells in some tens of milliseconds.
MaskedTable mask_table(std::span<const double> counts, std::size_t rows, std::size_t columns,
                       double threshold);

}  // namespace countsel
