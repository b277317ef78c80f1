// engine/rates/adjust.cpp -- Holm's step down and Benjamini and Hochberg's step up.
#include "engine/rates/adjust.hpp"

#include <algorithm>
#include <cmath>

namespace countsel {

std::vector<double> adjust_p_values(std::span<const double> p_values, Adjust adjust) {
  std::vector<double> adjusted(p_values.begin(), p_values.end());
  if (adjust == Adjust::none) return adjusted;
  std::vector<std::size_t> order;
  for (std::size_t i = 0; i < p_values.size(); ++i)
    if (!std::isnan(p_values[i])) order.push_back(i);
  std::sort(order.begin(), order.end(),
            [&](std::size_t a, std::size_t b) { return p_values[a] < p_values[b]; });
  const auto n = static_cast<double>(order.size());
  if (adjust == Adjust::holm) {
    double largest = 0;
    for (std::size_t rank = 0; rank < order.size(); ++rank) {
      largest = std::max(largest, std::min(1.0, (n - static_cast<double>(rank)) * p_values[order[rank]]));
      adjusted[order[rank]] = largest;
    }
  } else {
    double smallest = 1;
    for (std::size_t rank = order.size(); rank-- > 0;) {
      smallest = std::min(smallest, n / static_cast<double>(rank + 1) * p_values[order[rank]]);
      adjusted[order[rank]] = smallest;
    }
  }
  return adjusted;
}

}  // namespace countsel
