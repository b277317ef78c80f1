// protocol/data/cells.hpp -- what a text cell means where a number is wanted.
#pragma once

#include <string>
#include <string_view>

#include "protocol/declare/asked.hpp"

namespace countsel {

enum class Reads { number, ambiguous, decimal_comma, no_number, bad_grouping };
struct CellNumber {
  Reads reads;
  double value = 0;
};

/// Reads a text as a number under the rules given. "3,5" is a decimal comma, "1,200" and "1.200" (in a
/// text) could be either unless the rules settle it.
CellNumber read_number(std::string_view text, const CellRules& rules);

/// A host's error text: #N/A, #DIV/0!, #REF!, Err:502, …
bool error_text(std::string_view text);

}  // namespace countsel
