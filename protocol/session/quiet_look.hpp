// protocol/session/quiet_look.hpp -- the audit that runs before every question, and says only what touches
// it.
//
// `look_over` says all it finds to whoever asks; here only strong doubts about the columns that the question
// uses become notes, one for each kind.
// Checked by: tests/protocol/look_over_test.py.
#pragma once

#include "protocol/data/intake.hpp"
#include "protocol/data/places.hpp"
#include "protocol/declare/question.hpp"

namespace countsel {

/// Rows beyond which nothing is looked at: a table that large is looked over when asked.
inline constexpr std::size_t most_rows_looked_at = 20000;

/// Adds notes on exposures that jump, change level or look like logarithms, and on labels that repeat.
/// Cost: a few milliseconds at 10,000 rows.
void look_quietly(const Question& question, Asked& asked, const Places& places, std::vector<Note>& notes);

/// Gives a refused count that is not whole a better hint, where all of them look like rates at their
/// exposures.
void hint_at_rates(const Question& question, const Casting& casting, Refusal& refusal);

}  // namespace countsel
