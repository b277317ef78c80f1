// engine/models/layout.hpp -- how a design's columns are laid out for the passes over the rows.
//
// Numbers become the dense columns of a block. Level columns are joined into a few groups, each with
// one code a row: sums are kept by that code and only later added up to the levels of each term, so
// that a row costs one addition of a vector for all the level columns of a group together.
#pragma once

#include <cstdint>
#include <optional>
#include <span>
#include <vector>

#include "engine/models/design.hpp"

namespace countsel {

/// A dense column of the blocks. Column 0 is the constant.
struct DenseColumn {
  Product product;
  /// Centred and scaled within the loops. A multiplier of levels may be centred only where those levels stand
  /// in the model by themselves, since only then does the shift stay inside the model.
  bool centred = true;
  std::optional<std::size_t> coefficient;  ///< none: only a multiplier of levels
};

/// Level columns read as one code a row.
struct Group {
  std::vector<std::int32_t> owned;
  std::span<const std::int32_t> codes;            ///< n; of `owned`, or the caller's
  std::vector<std::size_t> factors;               ///< source columns
  std::vector<std::vector<std::int32_t>> tuples;  ///< levels of the factors, by code
  std::vector<std::size_t> multipliers;  ///< dense columns that some block of the group is multiplied by
  std::size_t size() const { return tuples.size(); }
  std::size_t slot(std::size_t multiplier) const;  ///< its place in `multipliers`
};

/// Two groups' codes as one, where a table of both would be too large.
struct GroupPair {
  std::size_t first = 0, second = 0;
  std::vector<std::int32_t> codes;  ///< n; empty: the code is first * size of second + second
  std::vector<std::pair<std::int32_t, std::int32_t>> tuples;
  std::size_t size = 0;
};

/// Coefficients of one term and one product: a level each.
struct Block {
  std::size_t group = 0;
  std::size_t multiplier = 0;             ///< dense column; 0 for the levels alone
  std::vector<std::int32_t> level_of;     ///< of each group code; -1 at a reference
  std::vector<std::size_t> coefficients;  ///< of each level
  std::optional<std::size_t> base;  ///< the block of the same levels alone, where the multiplier is centred
};

struct Layout {
  const Design* design = nullptr;
  std::size_t rows = 0;
  std::size_t coefficients = 0;
  std::vector<DenseColumn> dense;
  std::vector<Group> groups;
  std::vector<GroupPair> pairs;  ///< every two groups
  std::vector<Block> blocks;
  /// Of each coefficient: its dense column, or its block and level.
  struct Place {
    std::optional<std::size_t> dense;
    std::size_t block = 0;
    std::size_t level = 0;
  };
  std::vector<Place> places;
};

/// Lays a design out; `design` must outlive the layout.
Layout lay_out(const Design& design);

/// A product's value in a row, from the caller's columns as they are.
double raw_value(const Design& design, const Product& product, std::size_t row);

}  // namespace countsel
