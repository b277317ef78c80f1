// engine/table/masking_checks.hpp -- what both ways of withholding refuse.
// Checked by: tests/engine/table/masking_test.cpp.
#pragma once

#include <cmath>
#include <cstdint>
#include <span>
#include <string>

#include "engine/refusal.hpp"

namespace countsel {

inline void require_threshold(double threshold) {
  if (!(threshold >= 3 && std::isfinite(threshold) && threshold == std::floor(threshold)))
    throw Refusal(Code::bad_value, "The threshold for withholding must be a whole number, 3 or more.", {},
                  "5 and 10 are common; the owner of the data decides.");
}

inline void require_counts(std::span<const double> counts) {
  for (std::size_t i = 0; i < counts.size(); ++i)
    if (!std::isnan(counts[i]) &&
        !(counts[i] >= 0 && std::isfinite(counts[i]) && counts[i] == std::floor(counts[i])))
      throw Refusal(Code::bad_count,
                    "Row " + std::to_string(i + 1) + " of count is not a whole number, 0 or more.",
                    {{"count", static_cast<std::int64_t>(i + 1)}});
}

}  // namespace countsel
