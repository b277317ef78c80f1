// protocol/data/totals.hpp -- a totals row among the data would count everything twice.
//
// Checked by: tests/protocol/totals_test.py.
#pragma once

#include "protocol/data/column_reader.hpp"

namespace countsel {

/// Looks for a row that is the sum of the others: one labelled total, all, sum or the like, or one
/// without a label at the end. Refuses totals_row, leaves it out, or keeps it, by the rule.
void settle_totals(const Question& question, const std::vector<ReadColumn>& roles, const Places& places,
                   Totals rule, RowsLeftOut& left_out);

}  // namespace countsel
