// protocol/wire/brief.hpp -- what was sent, quoted in a refusal, however long it was.
#pragma once

#include <string>
#include <string_view>

#include "protocol/wire/json_fwd.hpp"

namespace countsel {

/// At most about 60 characters of a text; what is cut off is shown as "…".
std::string brief(std::string_view text);
/// A value as JSON, cut likewise.
std::string brief_json(const Json& value);

}  // namespace countsel
