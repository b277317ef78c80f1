// engine/table/audit.hpp -- what looks wrong in a table of counts and exposures before anything is asked of
// it.
//
// Each check looks for one mistake that people make with such tables: an exposure booked in another unit for
// one month, exposures given as logarithms, rates where counts belong, a totals row among the data, a row
// entered twice. A finding says where and with which numbers; what to say of it is for others.
// Source: the mistakes are listed with their evidence in the project's needs; the checks are our own.
// Checked by: tests/engine/table/audit_test.cpp.
#pragma once

#include <cstdint>
#include <span>
#include <string>
#include <string_view>
#include <vector>

namespace countsel {

/// n rows of what is known; an empty span where there is no such column.
struct AuditTable {
  std::span<const double> counts, exposures;  ///< NaN for a blank
  std::span<const std::string> labels;        ///< "" for a blank
  std::span<const std::int32_t>
      series;  ///< rows of one code belong to one series, in their order; empty: one
};

enum class FindingKind {
  exposure_jump,       ///< value is `factor` times the median `usual` of its neighbours
  exposure_shift,      ///< from this row on exposures are `factor` times those before (medians value, usual)
  exposure_logarithm,  ///< all rows; value and usual are the least and the greatest
  rate_for_count,  ///< all rows; value counts the rows that are not whole; factor: the `per` they were stated
                   ///< at, NaN if none fits; row: the first of them
  totals_row,      ///< value is the sum of the rows it stands for
  repeated_label,  ///< same label in the same series as `other_row`
  repeated_period,  ///< the same, and the labels are periods
  nearly_repeated   ///< differs from the label of `other_row` in case or spaces only
};
enum class AuditColumn { count, exposure, label };

/// Rows from 1; 0 for the whole column. What does not apply is 0 or NaN. `sure`: strong enough to be
/// repeated unasked beside another answer; otherwise a doubt for whoever asked for the audit.
struct Finding {
  FindingKind kind;
  AuditColumn column;
  std::int64_t row, other_row;
  double value, usual, factor;
  bool sure;
};

/// All checks, in the order of the enumeration, rows rising. Columns of different lengths: length_mismatch.
std::vector<Finding> audit_table(const AuditTable& table);

// The checks one by one.
std::vector<Finding> exposure_jumps(const AuditTable& table);
std::vector<Finding> exposure_logarithms(const AuditTable& table);
std::vector<Finding> rates_for_counts(const AuditTable& table);
std::vector<Finding> totals_rows(const AuditTable& table);
std::vector<Finding> repeated_labels(const AuditTable& table);

/// Whether a label is a word for a total: "Total", "all wards", "sum", "overall", "grand total".
bool says_total(std::string_view label);
/// Whether all labels that are not blank are years, months, quarters, weeks or days, and there are some.
bool are_periods(std::span<const std::string> labels);

/// How the numbers of a column are made up: blanks and zeros apart.
struct NumberSummary {
  std::size_t rows = 0, blanks = 0, zeros = 0, negative = 0, not_whole = 0;
  double least, greatest;  ///< NaN where there is no number
};
NumberSummary summarise_numbers(std::span<const double> numbers);

}  // namespace countsel
