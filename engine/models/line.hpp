// engine/models/line.hpp -- how far to go along a step.
//
// The predictors at the start and their change are kept, so that trying a length costs one look at
// each row and no matrix. The score along the step falls from its start through 0 at the best length.
#pragma once

#include "engine/models/pass.hpp"

namespace countsel {

/// The share of the step, from 0 to 1, to be taken: all of it unless the score along it has turned by half of
/// what it was; else where it is near 0. 0 for a step that does not rise. Reads each `every`-th block.
double line_share(const Layout& layout, const Basis& basis, const RowData& data, const Family& family,
                  const Eigen::VectorXd& gamma, const Eigen::VectorXd& step, std::size_t every,
                  const Work& work);

}  // namespace countsel
