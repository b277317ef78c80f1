// protocol/data/only.hpp -- the rows that a request keeps: {"quarter":["Q1","Q2"]}.
//
// Checked by: tests/protocol/only_test.py.
#pragma once

#include <string>
#include <vector>

#include "protocol/declare/answer.hpp"
#include "protocol/wire/request.hpp"

namespace countsel {

/// One column and the levels to keep, as texts; "" is a blank.
struct Only {
  const Column* column;
  std::vector<std::string> values;
};

/// `of.only`, its columns found. Refuses bad_type, not_found.
std::vector<Only> read_only(const Table& table, const Json& rest);

/// One flag per row, 0 for those to leave out; empty if all are kept. Values that no row has are noted.
std::vector<char> rows_to_keep(const std::vector<Only>& only, std::size_t rows, std::vector<Note>& notes);

}  // namespace countsel
