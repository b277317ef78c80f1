// engine/models/family.hpp -- an exponential family with its link, as functions of a block of rows.
//
// All that the fitting loop knows of a model. Arrays are of `rows` (padded to a multiple of 4) values;
// `weight` may be null for 1 each. `eta` is the linear predictor with any log exposure added.
#pragma once

#include <cstddef>

namespace countsel {

struct Family {
  const char* name;
  /// Mean, score (derivative of the log-likelihood by eta) and expected information (of eta), weights
  /// included.
  void (*step)(std::size_t rows, const double* eta, const double* count, const double* exposure,
               const double* weight, double* mean, double* score, double* information);
  /// Raises the information where a count lies far above its mean, so that a Newton step ends near the count
  /// instead of far beyond it. Used far from the maximum alone; may be null.
  void (*damp)(std::size_t rows, const double* count, const double* mean, const double* weight,
               double* information);
  /// Adds weighted deviance and Pearson's statistic to sums[0] and sums[1].
  void (*fit)(std::size_t rows, const double* count, const double* mean, const double* weight, double* sums);
  /// The log-likelihood of a count at its own mean: what the deviance is measured from.
  double (*saturated)(double count);
  /// The canonical log link: the deviance between two models of the family then needs only their predictors,
  /// and all reduced models can share their passes.
  bool log_canonical;
};

const Family& poisson_log_family();

}  // namespace countsel
