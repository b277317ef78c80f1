// protocol/wording/drivers.hpp -- what is said of a rate model, never that anything causes anything.
#pragma once

#include <string>
#include <vector>

#include "engine/models/glm.hpp"
#include "engine/models/term_tests.hpp"
#include "protocol/declare/answer.hpp"
#include "protocol/wording/words.hpp"

namespace countsel {

/// One row of the table of ratios, as the sentence needs it.
struct SaidRatio {
  std::string term;
  OptionalText level;
  double ratio, low, high;
  bool reference;
};

/// The strongest term by its share of the deviance, with its most telling ratio.
std::string say_drivers(const Wording& wording, const Design& design, const std::vector<SaidRatio>& ratios,
                        const std::vector<TermTest>& strongest_first, double level, double rows);
/// References, aliased columns, infinite estimates, convergence, condition, spread.
void note_fit(const Wording& wording, const Design& design, const GlmFit& fit, bool scaled, bool robust,
              std::vector<Note>& notes);

}  // namespace countsel
