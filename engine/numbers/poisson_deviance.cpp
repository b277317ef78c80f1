// engine/numbers/poisson_deviance.cpp -- the deviance of one count, and the log chance made from it.
#include "engine/numbers/poisson_deviance.hpp"

#include <cmath>
#include <limits>

#include "engine/numbers/distributions.hpp"

namespace countsel {
namespace {

// log k! less k log k - k + log(2 pi k) / 2, for whole k > 0.
double stirling_error(double k) {
  constexpr double half_log_two_pi = 0.91893853320467274;
  if (k < 16) return log_gamma(k + 1) - (k + 0.5) * std::log(k) + k - half_log_two_pi;
  const double k2 = k * k;
  return (1.0 / 12 - (1.0 / 360 - (1.0 / 1260 - 1.0 / 1680 / k2) / k2) / k2) / k;
}

}  // namespace

double half_deviance(double count, double mean) {
  if (count == 0) return mean;
  if (mean == 0) return std::numeric_limits<double>::infinity();
  const double difference = count - mean;
  if (std::abs(difference) >= 0.1 * (count + mean)) return count * std::log(count / mean) - difference;
  // count log(count / mean) = 2 count artanh(v), whose first term is joined with -difference.
  const double v = difference / (count + mean);
  double power = 2 * count * v;
  double total = difference * v;
  for (int j = 1; j < 1000; ++j) {
    power *= v * v;
    const double next = total + power / (2 * j + 1);
    if (next == total) break;
    total = next;
  }
  return total;
}

double deviance_root(double count, double mean) {
  return std::copysign(std::sqrt(2 * half_deviance(count, mean)), count - mean);
}

double log_poisson(double count, double mean) {
  if (count == 0) return -mean;
  if (mean == 0) return -std::numeric_limits<double>::infinity();
  constexpr double two_pi = 6.2831853071795865;
  return -half_deviance(count, mean) - stirling_error(count) - 0.5 * std::log(two_pi * count);
}

}  // namespace countsel
