// protocol/masking/other_counts.hpp -- other counts that could stand behind what is shown.
//
// A count is safe when it could be another number with everything shown unchanged. So the others are made:
// for each withheld count at least one list in which it differs, inside the bounds that a reader knows, and
// with the same sum where the total is shown. Checked by: tests/protocol/masking_test.py, which attacks the
// answers.
#pragma once

#include <cstddef>
#include <span>
#include <vector>

#include "engine/table/masking.hpp"

namespace countsel {

struct OtherCounts {
  std::vector<std::vector<double>> changes;  ///< each: what is added to every count
  bool all_covered = true;                   ///< every withheld count changes in one of them
};

/// `same_sum`: the changes of each list add up to 0. At most `most` lists.
OtherCounts other_counts(std::span<const double> counts, const std::vector<Shown>& shown, double threshold,
                         bool same_sum, std::size_t most);

}  // namespace countsel
