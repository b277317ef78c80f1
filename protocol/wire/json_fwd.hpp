// protocol/wire/json_fwd.hpp -- the name of the small document tree; options use it, data never does.
#pragma once

#include <nlohmann/json_fwd.hpp>

namespace countsel {
using Json = nlohmann::ordered_json;
}  // namespace countsel
