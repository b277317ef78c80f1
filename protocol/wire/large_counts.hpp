// protocol/wire/large_counts.hpp -- what is beyond the largest count must not be rounded back to it.
//
// Checked by: tests/protocol/data/cells_test.cpp, tests/protocol/wire/request_reader_test.cpp.
#pragma once

#include <cstdint>
#include <string_view>

namespace countsel {

constexpr double largest_count = 9007199254740992.0;  ///< 2^53: up to here every whole number is a double

/// `value` is the double nearest to the number that `written` writes. Where that is 2^53 though more was
/// written, the next double is returned.
double beyond_largest_count(double value, std::string_view written);
double beyond_largest_count(std::uint64_t value);

}  // namespace countsel
