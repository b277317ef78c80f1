// engine/rates/funnel_spread.cpp -- winsorised deviates and the spread between units beyond chance.
#include <algorithm>
#include <cmath>
#include <vector>

#include "engine/numbers/sums.hpp"
#include "engine/rates/funnel.hpp"
#include "engine/refusal.hpp"

namespace countsel {
namespace {

constexpr double nan = std::numeric_limits<double>::quiet_NaN();

// The sum of squares after the `cut` lowest and highest are moved in to their neighbours.
double winsorised_square_sum(std::vector<double> z, std::size_t cut) {
  std::sort(z.begin(), z.end());
  const double low = z[cut], high = z[z.size() - 1 - cut];
  for (double& value : z) {
    value = std::clamp(value, low, high);
    value *= value;
  }
  return sum(z);
}

}  // namespace

UnitSpread spread_between_units(std::span<const double> counts, std::span<const double> expected,
                                double winsorise) {
  if (counts.size() != expected.size())
    throw Refusal(Code::length_mismatch, "Counts and expected numbers differ in length.");
  if (!(winsorise >= 0 && winsorise < 0.5))
    throw Refusal(Code::bad_value, "The winsorised share must be 0 or more and below 0.5 at each end.", {},
                  "0.1 is usual; 0 leaves every unit as it is.");
  std::vector<double> plain, logs, weights, squares;
  for (std::size_t i = 0; i < counts.size(); ++i) {
    if (!(expected[i] > 0)) continue;
    const double root = std::sqrt(expected[i]);
    plain.push_back((counts[i] - expected[i]) / root);
    logs.push_back(std::log(counts[i] / expected[i]) * root);  // -infinity at a count of 0
    weights.push_back(expected[i]);
    squares.push_back(expected[i] * expected[i]);
  }
  const std::size_t n = plain.size();
  if (n < 2) return {nan, nan, true};
  // A hair is added so that a tenth of thirty units is three of them, whatever the rounding of 0.1.
  const auto cut = static_cast<std::size_t>(std::floor(winsorise * static_cast<double>(n) * (1 + 1e-12)));

  UnitSpread spread;
  const double plain_sum = winsorised_square_sum(plain, cut);
  const double log_sum = winsorised_square_sum(std::move(logs), cut);
  spread.dispersion = plain_sum / static_cast<double>(n);
  spread.on_log_scale = std::isfinite(log_sum);
  const double excess = (spread.on_log_scale ? log_sum : plain_sum) - static_cast<double>(n - 1);
  const double total = sum(weights);
  spread.between_sd = std::sqrt(std::max(0.0, excess / (total - sum(squares) / total)));
  return spread;
}

}  // namespace countsel
