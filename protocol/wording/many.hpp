// protocol/wording/many.hpp -- what is said of the rates of several groups.
#pragma once

#include <string>
#include <vector>

#include "engine/rates/many_rates.hpp"
#include "protocol/declare/answer.hpp"
#include "protocol/wording/words.hpp"

namespace countsel {

/// Do they differ beyond chance: the verdict, with how its chance was found.
std::string say_differ(const Wording& wording, std::size_t groups, double count, double exposure,
                       const ManyRatesTest& test, const std::string& name, double level);
/// Which pairs differ after the adjustment, the clearest first.
std::string say_pairs(const std::vector<std::string>& groups, const std::vector<RatePair>& pairs,
                      double level, Adjust adjust);
/// Two groups; few events for chi-square; how a simulated p-value may wander.
void note_differ(const Wording& wording, const std::vector<double>& counts,
                 const std::vector<double>& exposures, const ManyRatesTest& test, double draws, double level,
                 std::vector<Note>& notes);

}  // namespace countsel
