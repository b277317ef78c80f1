// engine/models/double_double.hpp -- numbers of twice a double's digits, for sums that nearly cancel.
//
// A value is the unevaluated sum of two doubles, about 32 digits. Used where nearly dependent columns
// are turned into well-conditioned ones; never in the inner loops.
// Source: Dekker, Numer. Math. 18 (1971) 224; Knuth, TAOCP vol. 2, section 4.2.2.
#pragma once

#include <cmath>

#include "engine/numbers/exact.hpp"

namespace countsel {

struct DoubleDouble {
  double high = 0;
  double low = 0;

  DoubleDouble() = default;
  DoubleDouble(double value) : high(value) {}
  DoubleDouble(double h, double l) : high(h), low(l) {}
  DoubleDouble(const Pair& pair) : high(pair.high), low(pair.low) {}
  double value() const { return high + low; }
};

inline DoubleDouble operator+(const DoubleDouble& a, const DoubleDouble& b) {
  DoubleDouble s = two_sum(a.high, b.high);
  const DoubleDouble t = two_sum(a.low, b.low);
  s.low += t.high;
  s = {s.high + s.low, s.low - ((s.high + s.low) - s.high)};
  s.low += t.low;
  return {s.high + s.low, s.low - ((s.high + s.low) - s.high)};
}

inline DoubleDouble operator-(const DoubleDouble& a) { return {-a.high, -a.low}; }
inline DoubleDouble operator-(const DoubleDouble& a, const DoubleDouble& b) { return a + -b; }

inline DoubleDouble operator*(const DoubleDouble& a, const DoubleDouble& b) {
  const double p = a.high * b.high;
  const double e = std::fma(a.high, b.high, -p) + (a.high * b.low + a.low * b.high);
  const double s = p + e;
  return {s, e - (s - p)};
}

}  // namespace countsel
