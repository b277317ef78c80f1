// engine/numbers/negative_binomial.cpp -- chances, tails and quantiles of the negative binomial.
#include "engine/numbers/negative_binomial.hpp"

#include <algorithm>
#include <cmath>
#include <limits>

#include "engine/numbers/distributions.hpp"
#include "engine/numbers/large_shapes.hpp"
#include "engine/numbers/poisson_deviance.hpp"

namespace countsel {
namespace {

constexpr double infinity = std::numeric_limits<double>::infinity();

// The least whole k >= 0 from which on `reached` holds, searched outwards from a guess.
template <typename Reached>
double least_whole(double guess, double stride, Reached reached) {
  double high = std::max(0.0, std::floor(guess)), low;
  stride = std::max(1.0, std::floor(stride));
  if (reached(high)) {
    do {
      if (high == 0) return 0;
      low = std::max(-1.0, high - stride);
      if (low < 0 || !reached(low)) break;
      high = low;
      stride *= 2;
    } while (true);
  } else {
    do {
      low = high;
      high = low + stride;
      stride *= 2;
      if (!std::isfinite(high)) return infinity;
    } while (!reached(high));
  }
  while (high - low > 1) {
    const double middle = std::floor(low + (high - low) / 2);
    if (middle == low || middle == high) break;  // beyond 2^53 whole numbers are further apart than 1
    (reached(middle) ? high : low) = middle;
  }
  return high;
}

// u - log(1 + u), with 1 + u given where u is too near -1 to hold it.
double gap(double u, double one_and_u) { return u < -0.5 ? u - std::log(one_and_u) : log1p_gap(u); }

double standard_deviation(double shape, double mean) { return std::sqrt(mean * (1 + mean / shape)); }

}  // namespace

double negative_binomial_log_exactly(double k, double shape, double mean) {
  if (k < 0) return -infinity;
  if (mean == 0) return k == 0 ? 0 : -infinity;
  if (std::isinf(shape)) return log_poisson(k, mean);
  if (k == 0) return -shape * std::log1p(mean / shape);
  constexpr double half_log_two_pi = 0.91893853320467274178;
  const double total = shape + k, whole = shape + mean;
  const double deviance = shape * gap((k - mean) / whole, total / whole) +
                          k * gap((mean - k) / k * (shape / whole), total / whole * (mean / k));
  return std::log(shape / total / k) / 2 - half_log_two_pi + stirling_error(total) - stirling_error(shape) -
         stirling_error(k) - deviance;
}

double negative_binomial_exactly(double k, double shape, double mean) {
  if (k < 0) return 0;
  if (mean == 0) return k == 0 ? 1 : 0;
  if (std::isinf(shape)) return poisson_exactly(k, mean);
  if (k == 0) return std::exp(-shape * std::log1p(mean / shape));
  return beta_front(k, shape, {mean, shape}) / k;
}

double negative_binomial_at_most(double k, double shape, double mean) {
  if (k < 0) return 0;
  if (mean == 0) return 1;
  if (std::isinf(shape)) return poisson_at_most(k, mean);
  if (k == 0) return std::exp(-shape * std::log1p(mean / shape));
  return beta_tails(k + 1, shape, {mean, shape}).above;
}

double negative_binomial_at_least(double k, double shape, double mean) {
  if (k <= 0) return 1;
  if (mean == 0) return 0;
  if (std::isinf(shape)) return poisson_at_least(k, mean);
  if (k == 1) return -std::expm1(-shape * std::log1p(mean / shape));
  return beta_tails(k, shape, {mean, shape}).below;
}

double negative_binomial_quantile(double p, double shape, double mean) {
  const double sd = standard_deviation(shape, mean);
  return least_whole(mean + normal_quantile(p) * sd, sd / 4,
                     [&](double k) { return negative_binomial_at_most(k, shape, mean) >= p; });
}

double negative_binomial_upper_quantile(double q, double shape, double mean) {
  const double sd = standard_deviation(shape, mean);
  return least_whole(mean + normal_upper_quantile(q) * sd, sd / 4,
                     [&](double k) { return negative_binomial_at_least(k + 1, shape, mean) <= q; });
}

}  // namespace countsel
