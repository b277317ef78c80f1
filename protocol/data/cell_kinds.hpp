// protocol/data/cell_kinds.hpp -- what the cells of one column are, each kind with its rows.
//
// Nothing is judged here by what a role needs; that is done by who asked.
// Checked by: tests/protocol/look_over_test.py.
#pragma once

#include <cstdint>
#include <string>
#include <vector>

#include "engine/table/column.hpp"
#include "protocol/declare/asked.hpp"

namespace countsel {

/// Cells of one kind: how many, and the table's rows (from 1) of the first few.
struct CellsOfKind {
  std::size_t cells = 0;
  std::vector<std::int64_t> rows = {};
  std::string first = {};  ///< text of the first, where it is one
};

struct CellKinds {
  std::size_t rows = 0, numbers = 0, zeros = 0;
  CellsOfKind blank, text_number, decimal_comma, ambiguous, bad_grouping, error, boolean, nested, word;
  double least, greatest;          ///< NaN where there is no number
  std::size_t levels = 0;          ///< distinct words
  std::vector<double> values;      ///< of the rows kept, NaN where there is no number
  std::vector<std::int64_t> kept;  ///< the table's rows (from 1) of these; empty if all are

  std::int64_t row_of(std::size_t i) const {
    return kept.empty() ? static_cast<std::int64_t>(i) + 1 : kept[i];
  }

  /// Whether the column is one of numbers, apart from blanks and what went wrong.
  bool numeric() const;
  /// "numbers", "levels", "numbers and texts", "blank".
  std::string kind() const;
};

/// `kept` holds one entry a row, or is empty for all rows.
CellKinds kinds_of_cells(const Column& column, const CellRules& rules, const std::vector<char>& kept);

}  // namespace countsel
