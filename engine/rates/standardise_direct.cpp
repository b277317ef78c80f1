// engine/rates/standardise_direct.cpp -- stratum rates averaged with one set of weights.
#include <algorithm>
#include <cmath>
#include <limits>
#include <string>

#include "engine/numbers/distributions.hpp"
#include "engine/numbers/sums.hpp"
#include "engine/rates/checks.hpp"
#include "engine/rates/standardise.hpp"
#include "engine/rates/weighted_count.hpp"
#include "engine/refusal.hpp"

namespace countsel {
namespace {

constexpr double infinity = std::numeric_limits<double>::infinity();
constexpr double no_value = std::numeric_limits<double>::quiet_NaN();

// A group's standardised rate as a weighted sum of its counts, and how many events are in it.
struct Standardised {
  WeightedCount rate;
  double count = 0;
};

double require(const StrataTable& table, std::span<const double> weights, const DirectSpec& spec) {
  if (weights.size() != table.strata)
    throw Refusal(Code::length_mismatch, "Each stratum needs one weight.", {{"weight"}});
  for (std::size_t s = 0; s < weights.size(); ++s)
    if (!(weights[s] >= 0) || std::isinf(weights[s]))
      throw Refusal(Code::bad_value, "A weight is a number, 0 or more.",
                    {{"weight", static_cast<std::int64_t>(s + 1)}});
  const double total = sum(weights);
  if (!(total > 0)) throw Refusal(Code::bad_value, "All weights are 0.", {{"weight"}});
  require_probability(spec.confidence, "confidence");
  if (spec.reference && *spec.reference >= table.groups)
    throw Refusal(Code::bad_value, "The reference is not one of the groups.", {{"reference"}});
  const auto missing = missing_cells(table, weights);
  if (!missing.empty())
    throw Refusal(Code::bad_exposure,
                  "Group " + std::to_string(missing[0].group + 1) + " has no exposure in stratum " +
                      std::to_string(missing[0].stratum + 1) +
                      ", which has a weight; its rate there is unknown.",
                  {{"exposure"}}, "Merge strata, or give the stratum no weight.");
  return total;
}

Standardised standardised(const StrataTable& table, std::span<const double> weights, double total,
                          std::size_t group) {
  Standardised result;
  for (std::size_t s = 0; s < table.strata; ++s) {
    if (weights[s] == 0) continue;
    const std::size_t cell = table.at(group, s);
    add(result.rate, weights[s] / total / table.exposures[cell], table.counts[cell]);
    result.count += table.counts[cell];
  }
  return result;
}

double deviate(const DirectSpec& spec) {
  return normal_upper_quantile(spec.side == Side::both ? (1 - spec.confidence) / 2 : 1 - spec.confidence);
}

Limits trimmed(double low, double high, Side side) {
  return {side == Side::upper ? 0 : low, side == Side::lower ? infinity : high};
}

Limits rate_limits_of(const Standardised& one, const DirectSpec& spec) {
  if (spec.method == DirectMethod::gamma || spec.method == DirectMethod::mid_p)
    return gamma_limits(one.rate, spec.method == DirectMethod::mid_p, spec.confidence, spec.side);
  if (one.count == 0) return trimmed(no_value, no_value, spec.side);
  if (spec.method == DirectMethod::normal) {
    const double reach = deviate(spec) * std::sqrt(one.rate.variance);
    return trimmed(std::max(0.0, one.rate.value - reach), one.rate.value + reach, spec.side);
  }
  const Limits count =
      rate_limits(one.count, 1, {RateMethod::exact, spec.confidence, spec.side, StoppedBy::time, {}});
  const double scale = std::sqrt(one.rate.variance / one.count);
  return trimmed(std::max(0.0, one.rate.value + scale * (count.low - one.count)),
                 one.rate.value + scale * (count.high - one.count), spec.side);
}

Limits ratio_limits_of(const Standardised& one, const Standardised& reference, const DirectSpec& spec) {
  if (spec.method == DirectMethod::gamma || spec.method == DirectMethod::mid_p)
    return gamma_ratio_limits(one.rate, reference.rate, spec.method == DirectMethod::mid_p, spec.confidence,
                              spec.side);
  if (one.count == 0 || reference.count == 0) return trimmed(no_value, no_value, spec.side);
  const double ratio = one.rate.value / reference.rate.value;
  const double reach = deviate(spec) * std::hypot(std::sqrt(one.rate.variance) / one.rate.value,
                                                  std::sqrt(reference.rate.variance) / reference.rate.value);
  return trimmed(ratio * std::exp(-reach), ratio * std::exp(reach), spec.side);
}

}  // namespace

std::vector<AdjustedRate> direct_rates(const StrataTable& table, std::span<const double> weights,
                                       const DirectSpec& spec) {
  const double total = require(table, weights, spec);
  Standardised reference;
  if (spec.reference) reference = standardised(table, weights, total, *spec.reference);
  std::vector<AdjustedRate> rates;
  rates.reserve(table.groups);
  for (std::size_t g = 0; g < table.groups; ++g) {
    const auto row = [&](const std::vector<double>& cells) {
      return sum(std::span(cells).subspan(table.at(g, 0), table.strata));
    };
    const Standardised one = standardised(table, weights, total, g);
    const Limits limits = rate_limits_of(one, spec);
    AdjustedRate rate{row(table.counts), row(table.exposures), 0,        0,        one.rate.value,
                      limits.low,        limits.high,          no_value, no_value, no_value};
    rate.crude_rate = rate.count / rate.exposure;
    rate.expected = one.rate.value * total;
    if (spec.reference && *spec.reference == g) {
      rate.ratio = 1;
    } else if (spec.reference) {
      const Limits ratio = ratio_limits_of(one, reference, spec);
      rate.ratio = reference.count > 0 ? one.rate.value / reference.rate.value
                   : one.count > 0     ? infinity
                                       : no_value;
      rate.ratio_low = ratio.low;
      rate.ratio_high = ratio.high;
    }
    rates.push_back(rate);
  }
  return rates;
}

}  // namespace countsel
