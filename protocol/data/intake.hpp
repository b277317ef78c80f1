// protocol/data/intake.hpp -- from a table and its roles to the rows that a question can use.
//
// Every rule about cells (contract, section 3) is here: what is blank, what is a number, which rows are
// left out, what is refused and where. Columns without trouble are not copied.
// Checked by: tests/protocol/cells_test.py.
#pragma once

#include "protocol/data/only.hpp"
#include "protocol/data/places.hpp"
#include "protocol/declare/question.hpp"

namespace countsel {

/// Which column plays which role, by the request or by name.
struct Casting {
  std::vector<const Column*> roles;  ///< one per role of the question, null where not given
  std::vector<Only> only;            ///< which rows are kept
};
/// Refuses not_found, missing, bad_type.
Casting cast_roles(const Question& question, const Table& table, const Json& rest);

/// Fills the roles of `asked` from the table; adds notes on what was left out or repaired.
/// Refuses length_mismatch, too_few, bad_type, bad_count, bad_exposure, bad_value, error_cell, totals_row.
void take_in(const Question& question, const Table& table, const Casting& casting, const Places& places,
             Asked& asked, std::vector<Note>& notes);

}  // namespace countsel
