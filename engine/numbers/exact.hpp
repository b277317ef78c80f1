// engine/numbers/exact.hpp -- sums and products of doubles without their rounding.
//
// A product or sum of two doubles is itself plus a rounding error that is again a double. Where two such
// products are nearly equal (a count against its expectation at 1e9 events), their difference is
// only right if the errors are kept.
// Source: Dekker 1971, Numer. Math. 18; Knuth 1997, vol. 2, section 4.2.2.
// Checked by: tests/engine/numbers/exact_test.cpp.
#pragma once

#include <cmath>

namespace countsel {

/// high + low, exactly; |low| is at most half a unit in the last place of high.
struct Pair {
  double high, low;
};

inline Pair two_sum(double a, double b) {
  const double high = a + b, back = high - a;
  return {high, (a - (high - back)) + (b - back)};
}

/// Exact unless it overflows or the low part underflows.
inline Pair two_product(double a, double b) {
  const double high = a * b;
  return {high, std::fma(a, b, -high)};
}

/// a b - c d to about one unit in the last place of the result, however near the products are.
inline double product_difference(double a, double b, double c, double d) {
  const Pair ab = two_product(a, b), cd = two_product(c, d);
  const Pair gap = two_sum(ab.high, -cd.high);
  return gap.high + (gap.low + (ab.low - cd.low));
}

}  // namespace countsel
