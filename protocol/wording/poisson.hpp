// protocol/wording/poisson.hpp -- what is said of how counts vary, and what to do next.
#pragma once

#include <string>
#include <vector>

#include "engine/rates/count_fits.hpp"
#include "engine/rates/dispersion_tests.hpp"
#include "engine/rates/two_rates.hpp"
#include "engine/rates/zero_test.hpp"
#include "protocol/declare/answer.hpp"
#include "protocol/wording/words.hpp"

namespace countsel {

/// Names of the distributions on the wire, and as they are said.
std::string distribution_name(CountDistribution distribution);
std::string distribution_words(CountDistribution distribution);

struct SaidPoisson {
  const DispersionTest& test;
  const ZeroTest& zeros;
  const std::vector<CountFit>& fits;
  double rows, events, p_value, level;  ///< level: 1 - confidence
  Direction direction;
  double could_show;  ///< dispersion that would probably have shown; NaN where it cannot be said
  bool exposure;      ///< exposures differ between rows
};

/// The fit with the least AIC among those that converged.
const CountFit& best_fit(const std::vector<CountFit>& fits);
std::string say_poisson(const Wording& wording, const SaidPoisson& said);
/// Rough approximations, fits at an edge, which fits best.
void note_poisson(const SaidPoisson& said, double smallest_expected, double fit_df, std::vector<Note>& notes);

}  // namespace countsel
