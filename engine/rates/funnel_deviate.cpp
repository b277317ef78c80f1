// engine/rates/funnel_deviate.cpp -- exact tails, mid-p deviates, and their logs where tails underflow.
#include "engine/rates/funnel_deviate.hpp"

#include <algorithm>
#include <cmath>
#include <limits>

#include "engine/numbers/distributions.hpp"
#include "engine/numbers/negative_binomial.hpp"

namespace countsel {
namespace {

constexpr double infinity = std::numeric_limits<double>::infinity();
constexpr double smallest_tail = 1e-290;

// Log of half the count's chance and all that lies further out. Far out the terms fall fast; what is
// left after many of them is closed as a geometric series.
double log_mid_tail(double count, double shape, double mean, bool upper) {
  const bool poisson = std::isinf(shape);
  const double q = poisson ? 0 : mean / (shape + mean);
  const auto ratio = [&](double k) {  // chance of the next value outwards over that of k
    if (upper) return poisson ? mean / (k + 1) : (shape + k) / (k + 1) * q;
    if (k <= 0) return 0.0;
    return poisson ? k / mean : k / ((shape + k - 1) * q);
  };
  double k = count, term = 1, total = 0.5;
  for (int n = 0; n < 20000; ++n) {
    term *= ratio(k);
    total += term;
    k += upper ? 1 : -1;
    if (term < 1e-17 * total) break;
  }
  const double r = ratio(k);
  if (r < 1) total += term * r / (1 - r);
  return negative_binomial_log_exactly(count, shape, mean) + std::log(total);
}

}  // namespace

double normal_deviate_of_log_tail(double log_tail) {
  if (log_tail > -600) return normal_upper_quantile(std::exp(log_tail));
  constexpr double half_log_two_pi = 0.91893853320467274178;
  double z = std::sqrt(-2 * log_tail);
  for (int n = 0; n < 50; ++n) {
    const double s = 1 / (z * z);
    const double series = -s * (1 - s * (3 - s * (15 - 105 * s)));
    const double step =
        (-z * z / 2 - std::log(z) - half_log_two_pi + std::log1p(series) - log_tail) / (z + 1 / z);
    z += step;
    if (std::abs(step) < 1e-15 * z) break;
  }
  return z;
}

CountDeviate count_deviate(double count, double shape, double mean) {
  if (mean == 0) {
    if (count == 0) return {1, 1, 1, 0};
    return {1, 0, 0, infinity};
  }
  const double at = negative_binomial_exactly(count, shape, mean);
  const double lower = negative_binomial_at_most(count, shape, mean);
  const double upper = negative_binomial_at_least(count, shape, mean);
  const double p_value = std::min(1.0, 2 * std::min(lower, upper));
  const double mid_lower = lower - at / 2, mid_upper = upper - at / 2;
  const bool high = mid_upper < mid_lower;
  const double tail = high ? mid_upper : mid_lower;
  const double size = tail < smallest_tail
                          ? normal_deviate_of_log_tail(log_mid_tail(count, shape, mean, high))
                          : normal_upper_quantile(tail);
  return {lower, upper, p_value, high ? size : -size};
}

}  // namespace countsel
