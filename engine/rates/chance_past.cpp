// engine/rates/chance_past.cpp -- the distribution of the count to come, with the doubt of the past.
#include <algorithm>
#include <cmath>
#include <limits>

#include "engine/numbers/negative_binomial.hpp"
#include "engine/numbers/sums.hpp"
#include "engine/rates/chance.hpp"
#include "engine/refusal.hpp"

namespace countsel {
namespace {

constexpr double infinity = std::numeric_limits<double>::infinity();

void require_overdispersion(double overdispersion) {
  if (!(overdispersion >= 0 && std::isfinite(overdispersion)))
    throw Refusal(Code::bad_value, "The overdispersion must be 0 or more.", {},
                  "It is the squared coefficient of variation of the rate; 0 is Poisson.");
}

CountToCome certain_mean(double mean, double shape) {
  return {shape, {mean}, {0}, mean, std::sqrt(mean * (1 + mean / shape))};
}

}  // namespace

CountToCome count_to_come(double expected, double overdispersion) {
  if (!(expected >= 0 && std::isfinite(expected)))
    throw Refusal(Code::bad_value, "The expected count must be 0 or more.", {{"expected", 1}});
  require_overdispersion(overdispersion);
  return certain_mean(expected, 1 / overdispersion);
}

CountToCome count_to_come_after(double count, double exposure, double next_exposure, double overdispersion) {
  if (!(count >= 0 && std::isfinite(count) && count == std::floor(count)))
    throw Refusal(Code::bad_count, "The past count is not a whole number, 0 or more.", {{"count", 1}});
  if (!(exposure > 0 && std::isfinite(exposure)))
    throw Refusal(Code::bad_exposure, "The past exposure is not above 0.", {{"exposure", 1}});
  if (!(next_exposure > 0 && std::isfinite(next_exposure)))
    throw Refusal(Code::bad_exposure, "The next exposure is not above 0.", {{"next_exposure", 1}});
  require_overdispersion(overdispersion);
  const double posterior = count + 0.5, scale = next_exposure / exposure;
  if (overdispersion == 0) return certain_mean(posterior * scale, posterior);

  // The log density of the past's mean m under Jeffreys' prior m^-1/2 (1 + a m)^-1/2, times m, on a grid of
  // log m. The trapezium rule is exact to rounding for so smooth a function once the grid holds all of it;
  // the right tail of m falls like m^-(1 + 1/a), so the grid reaches as far as double numbers need.
  const double a = overdispersion, shape = 1 / a;
  const auto log_density = [&](double log_m) {
    const double m = std::exp(log_m);
    return negative_binomial_log_exactly(count, shape, m) + log_m / 2 - std::log1p(a * m) / 2;
  };
  const double centre = std::log(posterior);
  const double width = std::sqrt(1 / posterior + a);
  const double step = std::min(0.25 * width, 0.25);
  const auto edge = [&](double direction) {
    const double top = log_density(centre);
    double log_m = centre;
    while (std::abs(log_m) < 690 && log_density(log_m) > top - 745) log_m += direction * step;
    return log_m;
  };
  const double low = edge(-1), high = edge(1);
  CountToCome result;
  result.shape = shape;
  double largest = -infinity;
  for (double log_m = low; log_m <= high; log_m += step) {
    result.means.push_back(std::exp(log_m) * scale);
    result.log_weights.push_back(log_density(log_m));
    largest = std::max(largest, result.log_weights.back());
  }
  Sum total, first, second;
  for (const double weight : result.log_weights) total.add(std::exp(weight - largest));
  const double log_total = largest + std::log(total.value());
  for (std::size_t i = 0; i < result.means.size(); ++i) {
    result.log_weights[i] -= log_total;
    const double weight = std::exp(result.log_weights[i]), mean = result.means[i];
    first.add(weight * mean);
    second.add(weight * mean * (1 + (1 + a) * mean));
  }
  // The posterior falls like m^-(1/2 + shape + 1/2): its mean exists for a below 1, its variance for a below
  // 1/2.
  result.mean = a < 1 ? first.value() : infinity;
  result.sd = a < 0.5 ? std::sqrt(second.value() - result.mean * result.mean) : infinity;
  return result;
}

}  // namespace countsel
