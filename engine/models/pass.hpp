// engine/models/pass.hpp -- one pass over the rows: sums of scores and cross-products at given coefficients.
//
// Rows are cut into pieces by their number alone; each piece sums its blocks in order and the pieces
// are added in order, so that the sums do not depend on how many workers there are.
#pragma once

#include <functional>

#include "engine/models/blocks.hpp"
#include "engine/models/family.hpp"

namespace countsel {

enum class Aim {
  start,      ///< weighted least squares from the counts themselves: no coefficients are needed
  step,       ///< score and information at the coefficients
  all_rows,   ///< information 1 in every row of positive weight: for the columns' rank
  event_rows  ///< information 1 in rows with events: for the rank that events see
};

struct PassRequest {
  Aim aim = Aim::step;
  bool cross = true;         ///< cross-products, or scores alone
  bool fit = false;          ///< deviance, Pearson's statistic and the null deviance
  double null_log_rate = 0;  ///< for the null deviance
  double events = 0;         ///< weighted sum of the counts: fitted means far beyond it show a wild step
  std::size_t every = 1;     ///< blocks read: each `every`-th
  double start_rate = 1;     ///< for Aim::start: the overall rate
  /// May rewrite score and information of a block's rows before they are summed.
  std::function<void(const BlockReader& block, const double* mean, double* score, double* information)>
      rewrite;
};

struct Sums {
  std::size_t stride = 0;
  std::vector<double> cross;     ///< stride x stride, upper
  std::vector<double> gradient;  ///< stride
  struct ByGroup {
    std::vector<std::vector<double>> table;  ///< of each multiplier: code x stride
    std::vector<std::vector<double>> score;  ///< of each multiplier: code
  };
  std::vector<ByGroup> groups;
  std::vector<std::vector<double>> pairs;  ///< of each pair of groups: multiplier x multiplier x code
  double deviance = 0, pearson = 0, null_deviance = 0, null_pearson = 0;
};

Sums run_pass(const Layout& layout, const Basis& basis, const RowData& data, const Family& family,
              const Eigen::VectorXd& gamma, const PassRequest& request, const Work& work);

/// Calls `piece(first block, last block)` for every piece of the rows; `weight` is the memory of a piece's
/// sums in doubles, which bounds the number of pieces.
std::size_t piece_count(std::size_t blocks, std::size_t weight);

}  // namespace countsel
