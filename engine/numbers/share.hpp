// engine/numbers/share.hpp -- a chance kept as the two parts of a whole.
//
// Near 0 or 1, and against counts of 1e9, a chance rounded to one double has lost what a tail depends
// on. Kept as part : rest (two exposures, say), with what rounding dropped, nothing is lost.
// Source: own arithmetic on engine/numbers/exact.hpp.
// Checked by: tests/engine/numbers/distributions_test.cpp.
#pragma once

#include <algorithm>
#include <limits>

#include "engine/numbers/exact.hpp"

namespace countsel {

/// Both tails of a distribution at a point, each to its own digits.
struct Tails {
  double below, above;
};

/// The chance (part + part_low) / (part + part_low + rest + rest_low); all 0 or more but the low ones.
struct Share {
  double part, rest, part_low = 0, rest_low = 0;

  double chance() const { return part / (part + rest); }
  double other() const { return rest / (part + rest); }
  Share turned() const { return {rest, part, rest_low, part_low}; }
};

/// A chance p in [0, 1] as a share.
inline Share share_of(double p) {
  const Pair rest = two_sum(1, -p);
  return {p, rest.high, 0, rest.low};
}

/// The share `times` a : b, scaled so that neither part overflows. times, a, b above 0. Parts further apart
/// than a double reaches are taken to be as far apart as it does: neither becomes 0.
inline Share share_of_odds(double times, double a, double b) {
  int exponent_times, exponent_a, exponent_b;
  const Pair part = two_product(std::frexp(times, &exponent_times), std::frexp(a, &exponent_a));
  const double rest = std::frexp(b, &exponent_b);
  const int shift = exponent_times + exponent_a - exponent_b;
  constexpr double least = std::numeric_limits<double>::min();
  return shift > 0
             ? Share{part.high, std::max(std::ldexp(rest, -shift), least), part.low, 0}
             : Share{std::max(std::ldexp(part.high, shift), least), rest, std::ldexp(part.low, shift), 0};
}

/// (a rest - b part) / (part + rest): how far a of a + b lies above its expectation, to the last place.
inline double above_expected(double a, double b, const Share& share) {
  const Pair seen = two_product(a, share.rest), expected = two_product(b, share.part);
  const Pair gap = two_sum(seen.high, -expected.high);
  const double low = (seen.low - expected.low) + (a * share.rest_low - b * share.part_low);
  return (gap.high + (gap.low + low)) / (share.part + share.rest);
}

}  // namespace countsel
