// protocol/wording/chances.hpp -- chances and likely ranges as they are said.
//
// Checked by: tests/protocol/rates_cases_b_test.py.
#pragma once

#include <string>

#include "protocol/wording/words.hpp"

namespace countsel {

/// "11%", "99.6%", "more than 99.9%", "about 1 in 12,000", "practically 0".
std::string chance_text(double chance);

/// What is asked of a count to come: "8 or more", "at most 2", "exactly 0", "2 to 5"; empty for nothing.
struct AskedRange {
  double low, high;  ///< high +infinity: no upper end
  bool given = false;
};
std::string range_text(const AskedRange& range);

struct SaidChance {
  AskedRange range;
  double mean, chance, low, high;
  double past_count, past_exposure, next_exposure;  ///< NaN where the mean was given
  double overdispersion;
};
/// The chance asked for, then the range a count to come will likely lie in.
std::string say_chance(const Wording& wording, const SaidChance& said);

}  // namespace countsel
