// engine/table/group.cpp -- compensated sums, one for each group.
#include "engine/table/group.hpp"

#include "engine/numbers/sums.hpp"

namespace countsel {

GroupTotals add_up(std::span<const double> counts, std::span<const double> exposures,
                   std::span<const std::int32_t> codes, std::size_t groups) {
  GroupTotals totals;
  if (codes.empty()) {
    return {{sum(counts)}, {sum(exposures)}, {static_cast<double>(counts.size())}};
  }
  std::vector<Sum> count(groups), exposure(groups);
  totals.rows.assign(groups, 0);
  for (std::size_t i = 0; i < counts.size(); ++i) {
    const auto group = static_cast<std::size_t>(codes[i]);
    count[group].add(counts[i]);
    exposure[group].add(exposures[i]);
    totals.rows[group] += 1;
  }
  for (std::size_t g = 0; g < groups; ++g) {
    totals.count.push_back(count[g].value());
    totals.exposure.push_back(exposure[g].value());
  }
  return totals;
}

}  // namespace countsel
