// protocol/cli/fold.hpp -- lines no longer than a terminal.
#pragma once

#include <cstddef>
#include <string>

namespace countsel {

/// Characters seen: bytes that do not continue a UTF-8 sequence.
std::size_t seen_width(const std::string& text);
/// Words folded at 96 columns, lines after the first indented.
std::string folded(const std::string& text, std::size_t indent);

}  // namespace countsel
