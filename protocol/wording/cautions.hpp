// protocol/wording/cautions.hpp -- the cautions that go with every answer about rates.
#pragma once

#include "protocol/declare/answer.hpp"

namespace countsel {

/// Adds the standing caution to the notes.
void add_cautions(Answer& answer);

}  // namespace countsel
