// protocol/wording/comparison.hpp -- what is said of two rates.
#pragma once

#include <string>
#include <vector>

#include "engine/rates/two_rates.hpp"
#include "protocol/declare/answer.hpp"
#include "protocol/wording/words.hpp"

namespace countsel {

struct SaidComparison {
  std::string first, reference;  ///< names of the groups
  TwoRates data;                 ///< 1 is compared with 0
  double ratio, ratio_low, ratio_high;
  double difference, difference_low, difference_high;
  double difference_p, p_value;
  double could_show, could_show_below;
  double per, level;  ///< level: 1 - confidence
  Side side;
  Direction direction;
  std::string limits, test;  ///< names of the methods
};

/// Two or three sentences: both rates, the ratio with its limits, what chance alone would do.
std::string say_comparison(const Wording& wording, const SaidComparison& said);
/// Ratio and difference disagree; separate limits overlap although the ratio's leave out 1.
void note_comparison(const Wording& wording, const SaidComparison& said, const Limits& first_rate,
                     const Limits& reference_rate, std::vector<Note>& notes);

}  // namespace countsel
