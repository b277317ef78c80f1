// engine/rates/expected_could_show.hpp -- which ratios to an expected number would a test have shown?
//
// Against a fixed expected number a test rejects from some count on; the ratio sought is the one under
// which that count, or more, comes often enough. A Poisson tail as a function of its mean is a gamma
// tail, so the ratio is a gamma quantile.
// Source: Garwood, Biometrika 28 (1936) 437-442 (Poisson tails as gamma tails).
// Checked by: tests/engine/rates/expected_could_show_test.cpp.
#pragma once

#include "engine/rates/two_rates.hpp"

namespace countsel {

/// The nearest ratios above and below 1 of a count's mean to `expected` that the test (exact, mid_p, score
/// or likelihood, as expected_test has them) at the level 1 - confidence shows that way 8 times in 10.
///   expected  0 or more, finite
/// `either` looks both ways, `above` and `below` one way (the other is NaN). `below` is NaN where even no
/// event at all would not be shown; both are NaN with 0 expected. Refuses as expected_test, and a
/// confidence not inside (0, 1). Cost: O(log expected) tests.
CouldShow expected_could_show(double expected, TestMethod test, double confidence, Direction direction);

}  // namespace countsel
