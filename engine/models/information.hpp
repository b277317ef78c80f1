// engine/models/information.hpp -- the information matrix from a pass's sums.
//
// Of a level column with very many levels only the diagonal and its border against the rest are kept:
// such levels never meet in a row, so that memory stays linear in them.
// Checked by: tests/engine/models/information_test.cpp.
#pragma once

#include <Eigen/Core>
#include <vector>

#include "engine/models/pass.hpp"

namespace countsel {

/// Rows and columns are coefficients. `rest` are kept in full, `absorbed` by diagonal and border.
struct Information {
  std::vector<std::size_t> rest, absorbed;  ///< coefficients, in order
  Eigen::MatrixXd full;                     ///< rest x rest, symmetric
  Eigen::MatrixXd border;                   ///< rest x absorbed
  Eigen::VectorXd diagonal;                 ///< of the absorbed
};

/// Coefficients in the matrix's own order: which are active, and which are absorbed.
Information assemble(const Layout& layout, const Basis& basis, const Sums& sums);
Eigen::VectorXd assemble_score(const Layout& layout, const Basis& basis, const Sums& sums);

/// information * x, over all coefficients.
Eigen::VectorXd times(const Information& information, const Eigen::VectorXd& x);
/// The information of the model without some coefficients.
Information without(const Information& information, const std::vector<char>& dropped);

}  // namespace countsel
