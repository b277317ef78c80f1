// protocol/wording/units.hpp -- what is said of many units: who stands out, and how little a rank tells.
#pragma once

#include <string>
#include <vector>

#include "engine/rates/funnel.hpp"
#include "engine/rates/ranks.hpp"
#include "engine/rates/shrinkage.hpp"
#include "protocol/declare/answer.hpp"
#include "protocol/wording/words.hpp"

namespace countsel {

/// Names of the standings on the wire.
std::string standing_name(Standing standing);

struct SaidUnits {
  const std::vector<std::string>& labels;
  const Funnel& funnel;
  const std::vector<double>& p_adjusted;
  double inner, outer;     ///< the bands
  double level;            ///< of the adjusted p-values: 1 - confidence
  std::string benchmark;   ///< "4.2 falls per 1,000 bed-days", "a ratio of 1 to what was expected"
  std::string adjustment;  ///< "Benjamini and Hochberg"; empty for none
};

/// How many lie outside the bands beside how many would by chance, then who stands out of all of them.
std::string say_units(const SaidUnits& said);
/// Units too small to be low, flags are no verdicts, spread allowed for.
void note_units(const SaidUnits& said, std::vector<Note>& notes);
/// How far the first unit's rank may be off; ranks that were not drawn.
void note_ranks(const std::vector<std::string>& labels, const UnitRanks& ranks, const UnitRatePrior& prior,
                const std::string& level, std::vector<Note>& notes);

}  // namespace countsel
