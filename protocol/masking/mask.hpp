// protocol/masking/mask.hpp -- small counts withheld from an answer, and all that would give them away.
//
// The question is asked again with other counts in place of those withheld, and whatever then comes out
// differently is withheld too: figures, cells, points of the picture, sentences, notes. What is left is the
// same for both, so that nobody can tell from it which counts are the true ones. Source:
// engine/table/masking.hpp for the choice of counts. Checked by: tests/protocol/masking_test.py.
#pragma once

#include "protocol/declare/question.hpp"

namespace countsel {

/// Counts below `asked.mask_below` and what would reveal them become "<k"; numbers that rest on them null.
/// Nothing is done without that option. True if something was withheld.
bool mask_counts(const Question& question, Asked& asked, const Context& context, Answer& answer);

}  // namespace countsel
