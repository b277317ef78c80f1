// engine/numbers/sums.hpp -- sums over many rows that keep their digits and do not depend on the hands.
//
// Rows are summed in blocks of a fixed size with Neumaier's compensation, block sums likewise, so that
// an answer is the same however many workers share the blocks.
// Source: Neumaier 1974, Z. angew. Math. Mech. 54.
// Checked by: tests/engine/numbers/sums_test.cpp.
#pragma once

#include <cstddef>
#include <span>

namespace countsel {

/// A running sum that remembers what rounding dropped.
class Sum {
 public:
  void add(double value);
  void add(const Sum& block);  ///< with what that sum remembers
  double value() const { return total_ + lost_; }

 private:
  double total_ = 0, lost_ = 0;
};

/// Rows to a block, everywhere.
inline constexpr std::size_t block_rows = 4096;

/// Sum of all values; infinities and NaN as plain addition gives them.
double sum(std::span<const double> values);

}  // namespace countsel
