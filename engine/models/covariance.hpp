// engine/models/covariance.hpp -- how sure the coefficients are when the model's variance is not believed.
//
// Sandwich: the information's inverse around the sum of squared scores, by row or by cluster.
// Source: White, Econometrica 48 (1980) 817; MacKinnon and White, J. Econometrics 29 (1985) 305 (HC1
// to HC3); Liang and Zeger, Biometrika 73 (1986) 13 (clusters).
// Checked by: tests/engine/models/covariance_test.cpp, tests/reference/models/.
#pragma once

#include <Eigen/Core>
#include <cstdint>
#include <span>

#include "engine/models/glm.hpp"

namespace countsel {

enum class RobustKind { hc0, hc1, hc2, hc3 };  ///< hc1 = n/(n-p); hc2, hc3: r/sqrt(1-h), r/(1-h)
enum class ClusterKind { cr0, cr1 };           ///< cr1 = G/(G-1) times cr0

struct Covariance {
  Eigen::MatrixXd matrix;  ///< of all design coefficients, NaN where not finite or not defined
  Eigen::VectorXd errors;  ///< square roots of its diagonal
  double factor = 1;       ///< the small-sample factor used, or the dispersion (scaled)
  std::size_t clusters = 0;
  std::size_t undefined_rows = 0;  ///< rows of leverage 1, where hc2 and hc3 have no value
};

/// Heteroscedasticity-consistent. NaN throughout where n = p (hc1) or a row has leverage 1 (hc2, hc3).
Covariance robust_covariance(const GlmFit& fit, RobustKind kind, const Work& work = {});
/// By cluster; `cluster` n codes from 0. NaN throughout with a single cluster (cr1).
Covariance clustered_covariance(const GlmFit& fit, std::span<const std::int32_t> cluster, ClusterKind kind,
                                const Work& work = {});
/// The model's times `dispersion`, by default Pearson's statistic over its degrees of freedom (as it is: a
/// caller who wants it never below 1 passes that). NaN throughout without degrees of freedom.
Covariance scaled_covariance(const GlmFit& fit);
Covariance scaled_covariance(const GlmFit& fit, double dispersion);

}  // namespace countsel
