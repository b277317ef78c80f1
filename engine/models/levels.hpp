// engine/models/levels.hpp -- level columns: which levels occur, and several columns read as one.
#pragma once

#include <cstdint>
#include <span>
#include <vector>

#include "engine/models/design.hpp"

namespace countsel {

/// The levels of one column that have a row, in order of first appearance, and their exposure.
struct ObservedLevels {
  std::vector<std::int32_t> order;
  std::vector<double> exposure;  ///< by code
};

/// Refuses a code outside the column's levels (internal: the caller has made the codes).
ObservedLevels observe_levels(const SourceColumn& column, std::span<const double> exposure);

/// Several level columns as one: a code a row for the combination of their levels.
struct JointLevels {
  std::vector<std::int32_t> codes;                ///< n
  std::vector<std::vector<std::int32_t>> tuples;  ///< of each code, in order of first appearance
};

JointLevels join_levels(std::span<const SourceColumn> columns, const std::vector<std::size_t>& factors,
                        std::size_t rows);

}  // namespace countsel
