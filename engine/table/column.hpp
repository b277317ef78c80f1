// engine/table/column.hpp -- one column of a table, cells as they were sent.
//
// Numbers stay doubles, texts are interned once on the way in, so that a column is at the same time
// ready to be a slope (numbers) and ready to be levels (codes). Nothing is interpreted here.
// Checked by: tests/engine/table/column_test.cpp.
#pragma once

#include <cstdint>
#include <string>
#include <string_view>
#include <vector>

#include "engine/table/text_index.hpp"

namespace countsel {

/// What a cell without a text holds; texts are their index in `Column::texts`, from 0.
namespace tag {
constexpr std::int32_t number = -1;
constexpr std::int32_t blank = -2;
constexpr std::int32_t no = -3;      ///< false
constexpr std::int32_t yes = -4;     ///< true
constexpr std::int32_t nested = -5;  ///< a list or an object where a cell belongs
}  // namespace tag

struct Column {
  std::string name;
  std::vector<double> numbers;     ///< one per cell, NaN where there is no number; empty if no cell is one
  std::vector<std::int32_t> tags;  ///< one per cell; empty if every cell is a number
  std::vector<std::string> texts;  ///< distinct texts in order of first appearance
  bool levels_only = false;        ///< sent as levels and codes: never a slope
  bool doubtful_point = false;     ///< from a file, and every point in it could be a thousands mark
  bool infinite = false;           ///< holds an infinity, which only a packed column can
  std::uint64_t digest = 0;        ///< of the cells, not of the name; see column_digest

  std::size_t size() const { return tags.empty() ? numbers.size() : tags.size(); }
  bool all_numbers() const { return tags.empty(); }
  bool all_texts() const { return numbers.empty() && others == 0 && !tags.empty(); }
  std::int32_t tag_at(std::size_t i) const { return tags.empty() ? tag::number : tags[i]; }

  std::size_t others = 0;  ///< cells that are neither number nor text
};

/// Digest of the cells: the same for the same cells, however they were sent.
std::uint64_t column_digest(const Column& column);

/// Text of a cell as a level: 95.0 is "95", true is "true"; empty for a blank.
std::string level_text(const Column& column, std::size_t row);
/// A number's shortest text that reads back as the same double; whole ones without a point.
std::string number_text(double value);

/// Builds a column cell by cell; `take` gives it away finished.
class ColumnBuilder {
 public:
  void number(double value) {
    if (column_.tags.empty() && !tagged_) {
      column_.numbers.push_back(value);
    } else {
      tagged_number(value);
    }
  }
  void text(std::string_view text);  ///< "" and spaces are blanks
  void other(std::int32_t tag);      ///< blank, no, yes, nested
  void reserve(std::size_t cells) { column_.numbers.reserve(cells); }
  std::size_t size() const { return tagged_ ? column_.tags.size() : column_.numbers.size(); }
  void packed(std::vector<double>&& values);                                          ///< NaN is a blank
  void packed(std::vector<std::string>&& levels, std::vector<std::int32_t>&& codes);  ///< -1 is a blank
  Column take(std::string name);

 private:
  void tagged_number(double value);
  void start_tags();

  Column column_;
  bool tagged_ = false;
  TextIndex index_;
};

}  // namespace countsel
