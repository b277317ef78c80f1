// protocol/services/held_tables.hpp -- what is said of a table that is kept.
#pragma once

#include "protocol/declare/answer.hpp"
#include "protocol/wire/request.hpp"

namespace countsel {

/// One row per column: name, kind, rows, distinct values, blanks.
OutTable columns_table(const Table& table);

}  // namespace countsel
