// engine/numbers/sums.cpp -- compensated, block by block.
#include "engine/numbers/sums.hpp"

#include <algorithm>
#include <cmath>

#include "engine/numbers/exact.hpp"

namespace countsel {

void Sum::add(double value) {
  const Pair next = two_sum(total_, value);
  total_ = next.high;
  if (std::isfinite(next.low)) lost_ += next.low;
}

void Sum::add(const Sum& block) {
  add(block.total_);
  lost_ += block.lost_;
}

double sum(std::span<const double> values) {
  Sum all;
  for (std::size_t from = 0; from < values.size(); from += block_rows) {
    Sum block;
    for (const double value : values.subspan(from, std::min(block_rows, values.size() - from)))
      block.add(value);
    all.add(block);
  }
  return all.value();
}

}  // namespace countsel
