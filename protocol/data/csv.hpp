// protocol/data/csv.hpp -- a table from CSV (RFC 4180) or from tab-separated text.
//
// Checked by: tests/protocol/data/csv_test.cpp.
#pragma once

#include <string>
#include <string_view>

#include "protocol/declare/asked.hpp"
#include "protocol/wire/request.hpp"

namespace countsel {

/// Reads `text`. With `header`, the first row names the columns; one without a name, and all without a
/// header, are named by their number. A cell that is a number as JSON writes one becomes a number; every
/// other cell stays text ("007", "1,200"), and so does "1.200" where the rules make its point another mark.
/// Refuses bad_value (a quote out of place), bad_json (not UTF-8), too_large (too many columns).
Table read_delimited(std::string_view text, char delimiter, bool header, const CellRules& rules = {});

/// Names for columns without a header: "1", "2", ….
std::string numbered_name(std::size_t index);

}  // namespace countsel
