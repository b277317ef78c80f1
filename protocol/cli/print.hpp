// protocol/cli/print.hpp -- an answer or a refusal in a terminal.
#pragma once

#include <iosfwd>

#include "protocol/wire/json_fwd.hpp"

namespace countsel {

/// The sentence, the tables aligned, the notes.
void print_answer(std::ostream& out, const Json& answer);
void print_refusal(std::ostream& out, const Json& refused);

}  // namespace countsel
