// engine/models/reduced.hpp -- many models smaller than a fitted one, maximised together.
//
// With the canonical log link the deviance that a smaller model loses is 2 sum of mean (e^d - 1 - d),
// d the difference of predictors: every row adds something above 0, nothing cancels, and the counts
// are not needed again. All smaller models read a block once, so that twenty of them cost little more
// than one fit.
// Source: quasi-Newton directions after Nocedal, Math. Comp. 35 (1980) 773, started from the full
// model's information.
#pragma once

#include <optional>
#include <vector>

#include "engine/models/fitted.hpp"

namespace countsel {

/// The deviance lost by each smaller model; none where the passes did not settle it.
///   dropped  of each model, one flag a coefficient
///   accuracy share of its loss that a model may still have to gain; about a tenth of that is the loss's
///   error
std::vector<std::optional<double>> deviance_lost(const FittedModel& model,
                                                 const std::vector<std::vector<char>>& dropped,
                                                 double accuracy, const Work& work);

}  // namespace countsel
