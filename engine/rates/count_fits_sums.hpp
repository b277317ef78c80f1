// engine/rates/count_fits_sums.hpp -- several sums over rows at once, by blocks, whoever does them.
//
// Blocks of a fixed size and compensated sums, so that neither the workers nor the rounding shows.
// Checked by: tests/engine/rates/count_fits_test.cpp.
#pragma once

#include <algorithm>
#include <array>
#include <cstddef>
#include <vector>

#include "engine/numbers/sums.hpp"
#include "engine/work.hpp"

namespace countsel {

/// The sums over i < rows of the K values of one(i).
template <std::size_t K, typename One>
std::array<double, K> sums_over(std::size_t rows, const Work& work, const One& one) {
  const std::size_t blocks = (rows + block_rows - 1) / block_rows;
  std::vector<std::array<double, K>> parts(blocks);
  const auto piece = [&](std::size_t block) {
    work.progress.check();
    std::array<Sum, K> sums;
    const std::size_t end = std::min(rows, (block + 1) * block_rows);
    for (std::size_t i = block * block_rows; i < end; ++i) {
      const std::array<double, K> values = one(i);
      for (std::size_t k = 0; k < K; ++k) sums[k].add(values[k]);
    }
    for (std::size_t k = 0; k < K; ++k) parts[block][k] = sums[k].value();
  };
  if (blocks == 1) {
    piece(0);
  } else {
    work.workers.run(blocks, piece);
  }
  std::array<Sum, K> totals;
  for (const auto& part : parts)
    for (std::size_t k = 0; k < K; ++k) totals[k].add(part[k]);
  std::array<double, K> result;
  for (std::size_t k = 0; k < K; ++k) result[k] = totals[k].value();
  return result;
}

}  // namespace countsel
