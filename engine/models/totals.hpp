// engine/models/totals.hpp -- the counts before any model: checks, sums, the overall rate.
#pragma once

#include "engine/models/blocks.hpp"
#include "engine/models/family.hpp"

namespace countsel {

struct Totals {
  double rows = 0;       ///< effective
  double weight = 0;     ///< sum of weights
  double events = 0;     ///< weighted
  double log_rate = 0;   ///< log of events over exposure, both weighted; -infinity without events
  double saturated = 0;  ///< log-likelihood of every count at its own mean
};

/// Refuses what GlmData does not allow: bad_count, bad_exposure, bad_value, length_mismatch, too_few.
Totals add_up(const GlmData& data, const Family& family, const Work& work);

}  // namespace countsel
