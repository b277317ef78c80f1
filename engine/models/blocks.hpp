// engine/models/blocks.hpp -- the rows, a block at a time, in the columns a fit works in.
#pragma once

#include <Eigen/Core>
#include <span>
#include <vector>

#include "engine/models/basis.hpp"
#include "engine/models/glm.hpp"
#include "engine/models/kernel.hpp"

namespace countsel {

/// What stands beside the design's columns in each row. `weight` is the effective one: null for 1 each; a row
/// that is set apart has 0.
struct RowData {
  std::size_t rows = 0;
  const double* count = nullptr;
  const double* exposure = nullptr;      ///< null: 1 each
  const double* log_exposure = nullptr;  ///< null: 0 each
  const double* weight = nullptr;
};

/// One block as it is read. Arrays are of block_rows; rows from `size` to the next multiple of 4 are padding.
struct BlockReader {
  const Layout& layout;
  const Basis& basis;
  const RowData& data;
  const Kernel& loops;

  std::size_t start = 0;   ///< the block's first row
  std::size_t size = 0;    ///< its rows
  std::size_t padded = 0;  ///< to a multiple of 4
  std::size_t stride = 0;
  const double* count = nullptr;
  const double* exposure = nullptr;
  const double* weight = nullptr;  ///< null: 1 each
  std::vector<double> z;           ///< block_rows x stride
  std::vector<double> eta;         ///< with log exposure, without exposure

  BlockReader(const Layout& layout, const Basis& basis, const RowData& data);
  /// Sets the working coefficients that eta is made with.
  void set(const Eigen::VectorXd& gamma);
  /// Reads block `index`.
  void read(std::size_t index);
  std::size_t block_count() const { return (data.rows + block_rows - 1) / block_rows; }
  /// information times the multiplier's column (0: information itself), in `scratch`.
  const double* times(std::size_t multiplier, const double* values, double* scratch) const;

 private:
  const double* whole_or_padded(const double* from, double pad, std::size_t slot);
  std::vector<double> gamma_dense;
  std::vector<std::vector<std::vector<double>>> gamma_level;  ///< group, multiplier, code
  std::vector<double> padding;  ///< copies of the sources where a block is not full, and computed columns
  std::vector<double> ones;
  std::vector<const double*> sources;
  std::vector<double> centre, scale;
};

}  // namespace countsel
