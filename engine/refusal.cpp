// engine/refusal.cpp -- the names of the refusal codes.
#include "engine/refusal.hpp"

#include <array>

namespace countsel {

std::string_view code_name(Code code) {
  static constexpr std::array names = {
      "bad_json",    "not_an_object", "unknown_ask",  "unknown_key",     "missing",     "bad_type",
      "bad_value",   "bad_count",     "bad_exposure", "length_mismatch", "too_few",     "too_large",
      "too_deep",    "error_cell",    "no_answer",    "not_found",       "not_allowed", "cancelled",
      "out_of_time", "out_of_memory", "totals_row",   "internal"};
  return names[static_cast<std::size_t>(code)];
}

}  // namespace countsel
