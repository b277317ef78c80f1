// protocol/masking/counts_shown.hpp -- which rows of the data stand behind each count that an answer shows.
//
// No question says so itself: a column of counts is recognised as the rows one by one, as sums by the levels
// of a role, or as such sums within one level of another role, and only where every number agrees.
// Checked by: tests/protocol/masking_test.py.
#pragma once

#include <cstdint>
#include <vector>

#include "protocol/declare/question.hpp"

namespace countsel {

/// A column of counts in an answer's table; `rows[i]` are the data's rows that its i-th count adds up.
struct CountList {
  static constexpr std::size_t nowhere = static_cast<std::size_t>(-1);
  std::size_t table, column;  ///< `nowhere`: the answer rests on these counts without showing them
  std::vector<double> counts;
  std::vector<std::vector<std::uint32_t>> rows;
};

struct CountsShown {
  std::vector<CountList> lists;
  bool all_known = true;  ///< false: a column of counts is none of the above
};

/// The role that holds the counts, or null.
Role* count_role(const Question& question, Asked& asked);
/// The declared style of a column; `number` where it is not declared.
Style style_of(const Question& question, const std::string& table, const std::string& column);

/// Where an answer has no column of counts: the counts of each group by the levels of the other roles.
CountsShown counts_shown(const Question& question, Asked& asked, const Answer& answer);

}  // namespace countsel
