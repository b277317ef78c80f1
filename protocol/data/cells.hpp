// protocol/data/cells.hpp -- what a text cell means where a number is wanted.
//
// Checked by: tests/protocol/data/cells_test.cpp.
#pragma once

#include <string>
#include <string_view>

#include "protocol/declare/asked.hpp"

namespace countsel {

enum class Reads {
  number,
  ambiguous,      ///< a mark could be the decimal's or the thousands': "1,200", "1.200"
  decimal_comma,  ///< "3,5", while nobody said that the comma is the decimal mark
  bad_grouping,   ///< thousands marks at odd places
  no_number
};
struct CellNumber {
  Reads reads;
  double value = 0;
};

/// Which marks the rules name; naming one settles the other.
struct Marks {
  char decimal = '.', thousands = '\0';
  bool settled = false;
};
Marks marks_of(const CellRules& rules);

/// One mark, one to three digits before it and exactly three after, no zero first: "1,200", "1.200".
bool could_be_thousands(std::string_view text, char mark);

/// Reads a text as a number under the rules given; `value` is finite.
CellNumber read_number(std::string_view text, const CellRules& rules);

/// A host's error text: #N/A, #DIV/0!, #REF!, Err:502, …
bool error_text(std::string_view text);

}  // namespace countsel
