// engine/models/factor.hpp -- the information matrix factorised, and what is solved with it.
//
// Goes in the coefficients' order and leaves out each column that the ones before it explain.
// Source: Golub and Van Loan, Matrix Computations, 4th ed. 2013, sections 4.2.5 and 3.2.6.
// Checked by: tests/engine/models/information_test.cpp.
#pragma once

#include "engine/models/information.hpp"

namespace countsel {

struct Factor {
  std::vector<std::size_t> rest, absorbed;
  std::size_t coefficients = 0;
  std::vector<char> kept;    ///< of `rest`: its column is not explained by the ones before it
  Eigen::MatrixXd lower;     ///< Cholesky factor of the Schur complement; rows of columns left out are unit
  Eigen::MatrixXd border;    ///< rest x absorbed, zero in rows left out
  Eigen::VectorXd diagonal;  ///< of the absorbed; infinite where there is no information
  std::vector<std::size_t> dependent;  ///< coefficients left out, in order
  double least_pivot = 1;  ///< smallest share of a kept column that the ones before it do not explain
};

/// `least`: the share of a column's own information below which it counts as explained.
Factor factorise(const Information& information, std::size_t coefficients, double least);

/// x with information * x = score, over all coefficients; 0 where inactive or left out.
Eigen::VectorXd solve(const Factor& factor, const Eigen::VectorXd& score);
/// The inverse's diagonal, over all coefficients; 0 where inactive or left out.
Eigen::VectorXd inverse_diagonal(const Factor& factor);
/// The whole inverse (coefficients x coefficients), zero rows where inactive or left out.
Eigen::MatrixXd inverse(const Factor& factor);
/// Standard errors of the design's coefficients, without the whole inverse.
Eigen::VectorXd design_errors(const Layout& layout, const Basis& basis, const Factor& factor);
/// How much of each column in `left_out` the kept ones explain: information(kept, kept)^-1 information(kept,
/// j).
Eigen::VectorXd regress(const Factor& factor, const Information& information, std::size_t coefficient);

}  // namespace countsel
