// engine/table/group.hpp -- rows added up within their groups.
//
// Checked by: tests/engine/table/group_test.cpp.
#pragma once

#include <cstdint>
#include <span>
#include <vector>

namespace countsel {

struct GroupTotals {
  std::vector<double> count, exposure;
  std::vector<double> rows;
};

/// Sums of counts and exposures by group, without loss to rounding.
///   counts, exposures  n rows;  codes  n rows, 0 to groups - 1, or empty: one group
GroupTotals add_up(std::span<const double> counts, std::span<const double> exposures,
                   std::span<const std::int32_t> codes, std::size_t groups);

}  // namespace countsel
