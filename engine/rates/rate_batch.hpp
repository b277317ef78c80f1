// engine/rates/rate_batch.hpp -- limits for a whole column of counts at once.
//
// The limits of a count depend on the exposure only through a division, so each count met often is
// worked out once; and because an exact limit is a smooth function of the count, large counts are
// read off a verified Chebyshev fit instead of inverting a gamma tail for every row.
// Source: as engine/rates/limits.hpp; Chebyshev interpolation after Trefethen 2013.
// Checked by: tests/engine/rates/rate_batch_test.cpp; timed by tests/bench/rate_limits_bench.cpp.
#pragma once

#include <span>

#include "engine/rates/limits.hpp"
#include "engine/work.hpp"

namespace countsel {

/// rate_limits for every row.
///   counts, exposures  n rows, as rate_limits takes them
///   low, high          n rows, filled
/// Agrees with rate_limits to 4e-15 relative. The rows' answers do not depend on the number of hands.
/// Refuses length_mismatch, and what rate_limits refuses, naming the first bad row (`count` or
/// `exposure`, from 1).
void rate_limits(std::span<const double> counts, std::span<const double> exposures, const LimitsSpec& spec,
                 std::span<double> low, std::span<double> high, const Work& work);

}  // namespace countsel
