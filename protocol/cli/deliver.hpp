// protocol/cli/deliver.hpp -- what a command prints reaches its reader, or the command has failed.
#pragma once

#include <string>

namespace countsel {

/// Writes `text` to standard output and returns `status`; 3 (said on standard error) if it cannot be
/// written. A reader that went away, as `head` does, is no failure.
int deliver(const std::string& text, int status);

}  // namespace countsel
