// engine/models/start.hpp -- where Newton's method starts, without being told.
//
// Weighted least squares on the logarithms of the counts, each drawn half-way to the overall rate,
// lands near however far the counts range. On many rows a spread-out sample is fitted first.
#pragma once

#include "engine/models/dependence.hpp"
#include "engine/models/totals.hpp"

namespace countsel {

struct Start {
  Eigen::VectorXd gamma;
  Eigen::VectorXd step;  ///< a first step from there, its effect not yet seen; empty if none
  double rise = 0;       ///< score along the step
  int passes = 0;        ///< over all rows
};

/// The overall rate in every row.
Eigen::VectorXd home(const Layout& layout, double log_rate);

Start find_start(const Layout& layout, const Basis& basis, const RowData& data, const Family& family,
                 const Totals& totals, const Work& work);

/// A level's Newton step up is exp(gap) - 1 where the level stands alone; its logarithm is the gap itself.
/// True if a step was long enough to be shortened.
bool shorten_level_steps(const Layout& layout, const Basis& basis, Eigen::VectorXd& step);

}  // namespace countsel
