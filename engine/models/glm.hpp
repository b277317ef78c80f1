// engine/models/glm.hpp -- a rate model fitted by maximum likelihood: coefficients, errors, fit.
//
// Newton's method over blocks of rows. Columns are centred and scaled within the loop and mapped back,
// near dependencies are turned into well-conditioned columns in double-double arithmetic, exact ones
// are aliased (the later column), rows that the likelihood sends to a rate of 0 are recognised and set
// apart.
// Source: McCullagh and Nelder, Generalized Linear Models, 2nd ed. 1989, section 2.5; separation after
// Correia, Guimaraes and Zylkin, arXiv:1903.01633 (2019).
// Checked by: tests/engine/models/glm_test.cpp, tests/reference/models/.
#pragma once

#include <Eigen/Core>
#include <cstdint>
#include <memory>
#include <span>
#include <vector>

#include "engine/models/design.hpp"
#include "engine/work.hpp"

namespace countsel {

enum class WeightsAre {
  frequency,  ///< a row of weight 3 is three rows; degrees of freedom count the weights
  precision   ///< the variance is divided by it; degrees of freedom count the rows of positive weight
};

/// The counts and what stands beside them; spans are of n rows or, but for `count`, empty.
struct GlmData {
  std::span<const double> count;         ///< whole, 0 or more
  std::span<const double> exposure;      ///< above 0; empty: 1 each
  std::span<const double> log_exposure;  ///< added on the log scale, for exposures beyond a double
  std::span<const double> weight;        ///< 0 or more; a row of weight 0 is as if it were not there
  WeightsAre weights_are = WeightsAre::frequency;
};

enum class CoefficientStatus {
  finite,
  minus_infinity,  ///< no events where it would be seen: the likelihood rises all the way down
  plus_infinity,
  undetermined,  ///< bound up with infinite ones: the data do not say where it goes
  aliased        ///< a combination of earlier columns, left out
};

/// An aliased coefficient's column as a combination of the columns that were kept.
struct Alias {
  std::size_t coefficient;
  std::vector<std::pair<std::size_t, double>> combination;  ///< coefficient index, multiple
};

struct FittedModel;  // the fit in its working columns; see engine/models/fitted.hpp

struct GlmFit {
  /// On the link's scale, one a design coefficient: +-infinity where so, NaN where aliased or undetermined.
  Eigen::VectorXd coefficients;
  Eigen::VectorXd errors;      ///< standard errors from the expected information; NaN unless finite
  Eigen::MatrixXd covariance;  ///< NaN rows where not finite; empty beyond 2,000 coefficients
  std::vector<CoefficientStatus> status;
  std::vector<Alias> aliases;
  std::vector<std::size_t> separated_rows;  ///< rows (from 0) whose rate goes to 0
  double loglik = 0;                        ///< with its constants; the supremum where rows are separated
  double deviance = 0;
  double pearson = 0;
  double null_deviance = 0;  ///< of the baseline alone, with the same exposure
  double null_loglik = 0;
  double rows = 0;        ///< effective: sum of frequency weights, or rows of positive weight
  std::size_t rank = 0;   ///< estimated coefficients, the infinite ones included
  double df = 0;          ///< rows - rank
  double dispersion = 0;  ///< pearson / df; NaN where df is 0
  double condition = 1;   ///< of the scaled columns, an estimate; a doubt from about 1e12
  int iterations = 0;     ///< passes over all rows
  bool converged = false;
  double last_step = 0;   ///< length of the last step in standard errors: the state if not converged
  std::size_t worst = 0;  ///< the coefficient that moved most in it
  std::shared_ptr<const FittedModel> model;

  double aic() const { return 2 * static_cast<double>(rank) - 2 * loglik; }
  double bic() const;
};

/// Fits the Poisson model with log link: count ~ Poisson(exposure times exp(linear predictor)).
///   design  of n rows      data  n rows      work  told, asked and helped; the answer does not depend on it
/// No starting values. With every count 0 the baseline is minus infinity.
/// Refuses: lengths that differ (length_mismatch), no row of positive weight (too_few), counts, exposures or
/// weights out of range (bad_count, bad_exposure, bad_value).
/// Accuracy: coefficients 1e-9, errors 1e-7 relative, columns shifted or scaled by 1e8, counts to 1e9,
/// exposures 1e-9 to 1e12, condition to 1e12. Cost: three to five passes over the rows, each O(rows x
/// columns^2) for numbers and O(rows x columns) for levels.
GlmFit fit_poisson(const Design& design, const GlmData& data, const Work& work = {});

}  // namespace countsel
