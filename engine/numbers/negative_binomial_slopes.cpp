// engine/numbers/negative_binomial_slopes.cpp -- slopes of the log chance, good to the Poisson edge.
//
// Written in spread = 1 / shape the slope is a sum of three parts that stay finite at spread 0; each is
// computed without the differences of digammas and logarithms that blow up there. Derivation: with r the
// shape and m the mean, -r^2 (digamma(y + r) - digamma(r) - log(1 + m/r) + (m - y)/(r + m)), its terms in
// 1/r, which add up to 0, taken out one by one.
#include <algorithm>
#include <cmath>

#include "engine/numbers/distributions.hpp"
#include "engine/numbers/large_shapes.hpp"
#include "engine/numbers/negative_binomial.hpp"

namespace countsel {
namespace {

// Whole j below `from` are summed one by one, the rest by Euler and Maclaurin, good from a + from >= 20 on.
double first_smooth(double a, double k) { return std::min(k, std::max(0.0, std::ceil(20 - a))); }

// Sum of j / (1 + s j) over whole j from 0 to y - 1.
double damped_sum(double y, double s) {
  const double from = y <= 40 ? y : first_smooth(1 / s, y);
  double total = 0;
  for (double j = 1; j < from; ++j) total += j / (1 + s * j);
  if (from == y) return total;
  const double at_from = 1 / (1 + s * from), at_y = 1 / (1 + s * y);
  // The integral; from is 0 wherever s is small.
  const double integral = from == 0 ? (s == 0 ? y * y / 2 : log1p_gap(s * y) / (s * s))
                                    : (y - from) / s - std::log1p(s * (y - from) * at_from) / (s * s);
  const auto power = [](double base, int n) { return std::pow(base, n); };
  return total + integral - (y * at_y - from * at_from) / 2 + (power(at_y, 2) - power(at_from, 2)) / 12 -
         s * s * (power(at_y, 4) - power(at_from, 4)) / 120 +
         power(s, 4) * (power(at_y, 6) - power(at_from, 6)) / 252 -
         power(s, 6) * (power(at_y, 8) - power(at_from, 8)) / 240;
}

}  // namespace

double digamma_rise(double a, double k) {
  const double from = k <= 40 ? k : first_smooth(a, k);
  double total = 0;
  for (double j = 0; j < from; ++j) total += 1 / (a + j);
  if (from == k) return total;
  const double x = a + from, y = a + k, step = (k - from) / (x * y);  // 1/x - 1/y
  const double u = 1 / x, v = 1 / y;
  // digamma(z) = log z - 1/(2 z) - 1/(12 z^2) + 1/(120 z^4) - 1/(252 z^6) + 1/(240 z^8), term by term
  const double two = u * u + v * v;
  const double by_step = 0.5 + (u + v) / 12 - (u + v) * two / 120 +
                         (u + v) * (two * two - u * u * v * v) / 252 -
                         (u + v) * two * (u * u * u * u + v * v * v * v) / 240;
  return total + std::log1p((k - from) / x) + step * by_step;
}

double negative_binomial_spread_slope(double y, double spread, double mean) {
  const double x = spread * mean;
  const double gap = x == 0 ? mean * mean / 2 : log1p_gap(x) / (spread * spread);
  return damped_sum(y, spread) - gap + (mean - y) * (mean / (1 + x));
}

}  // namespace countsel
