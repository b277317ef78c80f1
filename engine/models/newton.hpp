// engine/models/newton.hpp -- the one fitting loop: Newton's method with scores checked along the step.
//
// Source: McCullagh and Nelder, Generalized Linear Models, 2nd ed. 1989, section 2.5.
#pragma once

#include "engine/models/dependence.hpp"
#include "engine/models/totals.hpp"

namespace countsel {

struct NewtonResult {
  Eigen::VectorXd gamma;
  Settled last;  ///< at the last full pass: within rounding of gamma
  int passes = 0;
  bool converged = false;
  double last_step = 0;  ///< in standard errors
  std::size_t worst = 0;
};

/// Fits in the columns of `basis`, which may be straightened on the way. The deviance and its like in
/// `last.sums` are those at `gamma`.
NewtonResult newton(const Layout& layout, Basis& basis, const RowData& data, const Family& family,
                    const Totals& totals, const Work& work);

}  // namespace countsel
