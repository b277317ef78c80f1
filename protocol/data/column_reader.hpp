// protocol/data/column_reader.hpp -- one column read as what its role holds, cell by cell.
#pragma once

#include <map>

#include "protocol/data/places.hpp"
#include "protocol/declare/question.hpp"

namespace countsel {

/// Which rows are still in, and why the others are not.
class RowsLeftOut {
 public:
  /// `keep`: one flag per row, or empty: all are in.
  RowsLeftOut(std::size_t rows, std::vector<char> keep) : rows_(rows), keep_(std::move(keep)) {}

  bool in(std::size_t row) const { return keep_.empty() || keep_[row]; }
  void leave_out(std::size_t row, const std::string& why, const std::string& column);
  std::size_t kept() const;
  /// Sum over the rows left out here; those that `of.only` did not want are not among them.
  double sum_of_left_out(std::span<const double> values) const;
  std::vector<std::uint32_t> indices() const;  ///< empty if all rows are kept
  /// One note per reason and column.
  void tell(std::vector<Note>& notes, const Places& places) const;

 private:
  std::size_t rows_;
  std::vector<char> keep_;
  std::vector<std::tuple<std::string, std::string, std::vector<std::int64_t>>> reasons_;
};

/// A column as a role reads it; numbers and codes of all rows, also of those left out.
struct ReadColumn {
  const Column* column = nullptr;
  Holds holds = Holds::number;
  std::vector<double> numbers;  ///< empty: the column's own serve as they are
  std::span<const double> values() const {
    return numbers.empty() ? std::span(column->numbers) : std::span(numbers);
  }
};

class ColumnReader {
 public:
  ColumnReader(const Places& places, const CellRules& rules, RowsLeftOut& left_out, std::vector<Note>& notes)
      : places_(places), rules_(rules), left_out_(left_out), notes_(notes) {}
  ReadColumn read(const Column& column, Holds holds);
  /// Exposure 0 with count 0 leaves the row out, if so wanted; with a count above 0 it is refused.
  void settle_zero_exposures(const ReadColumn& exposure, const ReadColumn* count, bool leave_out);

 private:
  void read_numbers(ReadColumn& read);
  void convert_texts(ReadColumn& read);
  void judge(const ReadColumn& read);
  void check_infinities(const Column& column);
  void check_doubtful_point(const Column& column);
  void check_error_cells(const Column& column);

  const Places& places_;
  const CellRules& rules_;
  RowsLeftOut& left_out_;
  std::vector<Note>& notes_;
};

/// Fills a role with the kept rows; spans into the column where nothing had to change.
void fill_role(ReadColumn& read, const std::vector<std::uint32_t>& kept, std::shared_ptr<const Column> source,
               Role& role);

}  // namespace countsel
