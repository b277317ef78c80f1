// engine/models/patterns.hpp -- how many different rows the terms can tell apart.
//
// Each row's values in the columns that the terms use are hashed to 64 bits, and different hashes
// counted. Two patterns in a million rows share a hash with a chance of about 3e-8.
// Checked by: tests/engine/models/design_test.cpp.
#pragma once

#include <cstddef>

#include "engine/models/design.hpp"
#include "engine/work.hpp"

namespace countsel {

/// The number of distinct covariate patterns among the design's rows; 1 without terms. -0 is 0.
std::size_t count_patterns(const Design& design, const Work& work = {});

}  // namespace countsel
