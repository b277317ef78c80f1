// protocol/data/columns.hpp -- a table's columns by name, all of one length.
//
// Checked by: tests/protocol/data_forms_test.py, tests/protocol/cells_test.py.
#pragma once

#include <string>

#include "protocol/wire/request.hpp"

namespace countsel {

/// Refuses not_found with the nearest name; `what` ends the sentence: " for the role count".
const Column& find_column(const Table& table, const std::string& name, const std::string& what);

/// Refuses length_mismatch: a row or a column of another length than the first.
void check_lengths(const Table& table);

/// Refuses bad_value: two columns of one name.
void check_names(const Table& table);

}  // namespace countsel
