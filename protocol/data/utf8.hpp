// protocol/data/utf8.hpp -- is a text valid UTF-8? Lines are checked by their parser; this is for the rest.
#pragma once

#include <string_view>

namespace countsel {

/// True for well-formed UTF-8 (RFC 3629: no overlong forms, no surrogates) without NUL.
bool valid_utf8(std::string_view text);

}  // namespace countsel
