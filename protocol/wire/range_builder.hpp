// protocol/wire/range_builder.hpp -- a range arrives row by row and is kept column by column.
//
// The first row stands apart, for only later is it known whether it is a header. Cells beyond its width
// are counted, so that their row can be refused, but not kept.
#pragma once

#include <vector>

#include "protocol/wire/limits.hpp"
#include "protocol/wire/request.hpp"

namespace countsel {

class RangeBuilder {
 public:
  void begin_row() { cell_ = 0; }
  /// Where the next cell of the row goes; null if no column is there for it.
  ColumnBuilder* next_cell() {
    const std::size_t cell = cell_++;
    if (row_ == 0) return &first_row_;
    return cell < columns_.size() ? &columns_[cell] : nullptr;
  }
  /// False if the first row makes more columns than a table may have.
  bool end_row() {
    if (row_ == 0) {
      if (cell_ > limits::most_columns) return false;
      columns_.resize(cell_);
    } else if (cell_ != columns_.size() && uneven_row_ == 0) {
      uneven_row_ = static_cast<std::int64_t>(row_);
      uneven_cells_ = cell_;
    }
    ++row_;
    return true;
  }
  void finish(Of& of) {
    of.range.emplace();
    for (auto& column : columns_) of.range->push_back(column.take(""));
    of.first_row = first_row_.take("");
    of.uneven_row = uneven_row_;
    of.uneven_cells = uneven_cells_;
  }

 private:
  ColumnBuilder first_row_;
  std::vector<ColumnBuilder> columns_;
  std::size_t row_ = 0, cell_ = 0;
  std::int64_t uneven_row_ = 0;
  std::size_t uneven_cells_ = 0;
};

}  // namespace countsel
