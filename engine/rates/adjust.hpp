// engine/rates/adjust.hpp -- many p-values at once: how small is small?
//
// Holm keeps the chance of any false alarm at the level; Benjamini and Hochberg keep the expected share
// of false alarms among the alarms there. Adjusted values are compared with the level directly.
// Source: Holm, Scand. J. Statist. 6 (1979) 65-70; Benjamini and Hochberg, J. R. Statist. Soc. B 57
// (1995) 289-300.
// Checked by: tests/engine/rates/adjust_test.cpp.
#pragma once

#include <span>
#include <vector>

namespace countsel {

enum class Adjust { none, holm, bh };

/// Adjusted p-values, in the order given.
///   p_values  n values in [0, 1]; NaN (no value) stays NaN and does not count towards n
/// Returns n values, each at least its own p_value and at most 1. Ties stay ties. Cost: O(n log n).
std::vector<double> adjust_p_values(std::span<const double> p_values, Adjust adjust);

}  // namespace countsel
