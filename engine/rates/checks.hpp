// engine/rates/checks.hpp -- is this a count, an exposure, a confidence?
//
// Argument checks shared by the functions of this floor; written so that NaN fails.
// Checked by: tests/engine/rates/limits_test.cpp.
#pragma once

#include <cstddef>
#include <cstdint>
#include <limits>
#include <string_view>

namespace countsel {

/// Refuses bad_count unless count is whole, 0 or more and finite.
void require_count(double count, std::string_view name = "count", std::size_t row = 0);
/// Refuses bad_exposure unless exposure is above 0 and finite.
void require_exposure(double exposure, std::string_view name = "exposure", std::size_t row = 0);
/// Refuses bad_value unless 0 < value < 1.
void require_probability(double value, std::string_view name);
/// Refuses bad_value unless value is above 0 and finite.
void require_positive(double value, std::string_view name);

/// Is this a count, is this an exposure: the same conditions, for loops over rows. From 2^53 on every double
/// is whole.
inline bool is_count(double count) {
  if (!(count < 9007199254740992.0)) return count < std::numeric_limits<double>::infinity();
  return count >= 0 && static_cast<double>(static_cast<std::int64_t>(count)) == count;
}
inline bool is_exposure(double exposure) {
  return exposure > 0 && exposure < std::numeric_limits<double>::infinity();
}

}  // namespace countsel
