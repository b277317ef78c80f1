// protocol/services/quick.hpp -- a line as spoken in a meeting becomes a request.
//
// Checked by: tests/protocol/quick_test.py.
#pragma once

#include <string>

#include "protocol/declare/question.hpp"
#include "protocol/wire/request.hpp"

namespace countsel {

/// Turns a `quick` request into the request that its line was read as, and returns its question. What
/// the line was read as is kept in `request.read_as`. Refuses what cannot be read, with an example that can.
const Question& read_quick(Request& request);

}  // namespace countsel
