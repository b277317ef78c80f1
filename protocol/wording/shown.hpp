// protocol/wording/shown.hpp -- a table as people read it: headings with units, texts rounded.
#pragma once

#include <string>
#include <utility>
#include <vector>

#include "protocol/declare/answer.hpp"
#include "protocol/wording/words.hpp"

namespace countsel {

/// The heading of a column, from its declaration; a column without one is headed by its name.
std::string column_heading(const TableSpec* spec, const std::string& column, const Wording& wording);
/// Every column of the table as texts.
std::vector<std::pair<std::string, std::vector<std::string>>> shown_columns(const TableSpec* spec,
                                                                            const OutTable& table);
/// One number in a style, rounded without limits at hand.
std::string shown_number(double value, Style style);

}  // namespace countsel
