// engine/models/separation.hpp -- rows whose rate goes to 0, and the coefficients that go with them.
//
// A direction along which no row with events moves and rows without events only fall raises the
// likelihood for ever. Such directions are sought among the combinations that vanish on all rows with
// events: an exact search, no judging of a fit that drifts. Nonnegative least squares gives a direction
// or proves that there is none (a theorem of the alternative).
// Source: Correia, Guimaraes and Zylkin, arXiv:1903.01633 (2019), for the conditions; Lawson and Hanson,
// Solving Least Squares Problems (1974), chapter 23; Stiemke, Math. Ann. 76 (1915) 340.
// Checked by: tests/engine/models/separation_test.cpp.
#pragma once

#include <vector>

#include "engine/models/dependence.hpp"

namespace countsel {

/// The rows (from 0) that are separated, in order. `vanishing` are combinations of raw columns that are 0 in
/// every row with events.
std::vector<std::size_t> separated_rows(const Layout& layout, const Basis& basis, const RowData& data,
                                        const std::vector<LeftOut>& vanishing, const Work& work);

/// Where coefficients go, given combinations that vanish on all rows that are not separated: those in none of
/// them stay finite, the others rise, fall, or are not determined.
std::vector<CoefficientStatus> infinite_coefficients(const Layout& layout, const Basis& basis,
                                                     const std::vector<std::size_t>& separated,
                                                     const std::vector<LeftOut>& vanishing, const Work& work);

/// Nonnegative least squares: x >= 0 that brings sum of x_i column_i nearest to `target`; returns what is
/// left of it.
Eigen::VectorXd nonnegative_remainder(const Eigen::MatrixXd& columns, const Eigen::VectorXd& target,
                                      const Work& work);

}  // namespace countsel
