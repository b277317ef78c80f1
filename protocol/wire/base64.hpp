// protocol/wire/base64.hpp -- packed columns: base64 (RFC 4648, section 4) of little-endian doubles.
#pragma once

#include <optional>
#include <string_view>
#include <vector>

namespace countsel {

/// The doubles packed in `text`, or nothing if it is not padded base64 of a whole number of doubles.
std::optional<std::vector<double>> unpack_doubles(std::string_view text);

}  // namespace countsel
