// protocol/wording/climb.hpp -- what is said of a rate over ordered steps.
#pragma once

#include <string>
#include <vector>

#include "engine/rates/two_rates.hpp"
#include "protocol/declare/answer.hpp"
#include "protocol/wording/words.hpp"

namespace countsel {

struct SaidClimb {
  double ratio, low, high, p_value, departure_p;
  double level;      ///< 1 - confidence
  std::string step;  ///< "step", "unit of year"
  std::string first, last;
  std::size_t steps;
  double count;
  Direction direction;
  Side side;
};

/// Change for one step with its limits, what chance would do, whether a straight climb describes it.
std::string say_climb(const Wording& wording, const SaidClimb& said);
void note_climb(const SaidClimb& said, std::vector<Note>& notes);

}  // namespace countsel
