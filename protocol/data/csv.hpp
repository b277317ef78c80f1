// protocol/data/csv.hpp -- a table from CSV (RFC 4180) or from tab-separated text.
#pragma once

#include <string>
#include <string_view>

#include "protocol/wire/request.hpp"

namespace countsel {

/// Reads `text`. With `header`, the first row names the columns; else they are "1", "2", …. A cell that is
/// a number as JSON writes one becomes a number; every other cell stays text ("007", "1,200").
/// Refuses bad_value (a quote out of place, a column without a name), bad_json (not UTF-8).
Table read_delimited(std::string_view text, char delimiter, bool header);

/// Names for columns without a header: "1", "2", ….
std::string numbered_name(std::size_t index);

}  // namespace countsel
