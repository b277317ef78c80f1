// engine/models/dependence.hpp -- columns that others explain: told apart, left out or straightened.
//
// A Cholesky factor in double tells that a column is nearly explained, not whether it is wholly. The
// remainder is therefore worked out row by row in double-double. Where it is rounding in every row the
// column is aliased; otherwise the remainder itself, scaled up, becomes the working column.
// Source: iterative refinement after Bjorck, BIT 7 (1967) 257.
// Checked by: tests/engine/models/dependence_test.cpp.
#pragma once

#include <vector>

#include "engine/models/factor.hpp"

namespace countsel {

/// A coefficient left out of the basis: its raw column plus this combination of raw kept columns is 0 in
/// every row looked at. The combination has the coefficient itself with multiple 1 first.
struct LeftOut {
  std::size_t coefficient = 0;
  Combination combination;
};

struct Settled {
  std::vector<LeftOut> left_out;
  Information information;  ///< in the settled basis
  Factor factor;
  Sums sums;
  double condition = 1;  ///< of the columns before they were straightened, an estimate
};

/// The share of a column's information below which it is looked at row by row.
constexpr double doubtful_share = 1e-7;

/// True where fitted means run far beyond the counts: a step too long, whose weights say nothing of the
/// columns.
bool wild(const Sums& sums, const PassRequest& request);

/// Passes over the rows until every active working column stands on its own; `basis` loses the aliased
/// columns and takes in combined ones. `gamma` follows, so that the predictors stay.
Settled settle(const Layout& layout, Basis& basis, const RowData& data, const Family& family,
               Eigen::VectorXd& gamma, const PassRequest& request, const Work& work);

}  // namespace countsel
