// protocol/declare/describe.hpp -- a question's declaration as a document: what `questions` answers with.
#pragma once

#include "protocol/declare/question.hpp"

namespace countsel {

Json describe(const Question& question);
/// "count", "number above 0", … in the catalogue's words.
const char* holds_name(Holds holds);

}  // namespace countsel
