// protocol/services/held_tables.hpp -- what is said of a table that is kept.
#pragma once

#include "protocol/declare/answer.hpp"
#include "protocol/wire/request.hpp"

namespace countsel {

/// Refuses length_mismatch: what is held should be a table.
void check_table(const Table& table);
/// One row per column: name, kind, rows, distinct values, blanks.
OutTable columns_table(const Table& table);

}  // namespace countsel
