// protocol/questions/steps.hpp -- the ordered steps of does_it_climb: scores, names, events and exposure.
#pragma once

#include <string>
#include <vector>

#include "protocol/declare/answer.hpp"
#include "protocol/declare/asked.hpp"

namespace countsel {

/// Rows of one step added up. Numbers are their own scores and steps stand in their order; texts take the
/// scores 1, 2, 3, ... in the order in which they first appear.
struct Steps {
  bool numeric = false;
  std::vector<std::string> names;
  std::vector<double> score, count, exposure;
  std::vector<std::int32_t> codes;  ///< each row's step
};

/// Refuses too_few (one step) and bad_value where texts begin with numbers, as age bands do, that do not
/// rise in the order of appearance. Says in `notes` which scores were taken.
Steps steps_of(const RateAsked& asked, const Role& order, std::vector<Note>& notes);

}  // namespace countsel
