// engine/rates/many_rates.cpp -- equal rates by the chi-square law, and groups in pairs.
#include "engine/rates/many_rates.hpp"

#include <algorithm>
#include <cmath>
#include <limits>

#include "engine/numbers/distributions.hpp"
#include "engine/numbers/poisson_deviance.hpp"
#include "engine/numbers/sums.hpp"
#include "engine/rates/checks.hpp"
#include "engine/rates/many_rates_parts.hpp"
#include "engine/refusal.hpp"

namespace countsel {
namespace {

constexpr double infinity = std::numeric_limits<double>::infinity();
constexpr double no_value = std::numeric_limits<double>::quiet_NaN();

RatePair compare(std::span<const double> counts, std::span<const double> exposures, std::size_t first,
                 std::size_t second, const PairSpec& spec) {
  const TwoRates two{counts[first], exposures[first], counts[second], exposures[second]};
  const double rate0 = two.count0 / two.exposure0;
  const double ratio = rate0 > 0 ? two.count1 / two.exposure1 / rate0 : two.count1 > 0 ? infinity : no_value;
  const Limits limits = ratio_limits(two, spec.limits, spec.confidence, spec.side);
  const double p = ratio_test(two, spec.test, spec.direction);
  return {first, second, ratio, limits.low, limits.high, p, p};
}

void compare_all(std::vector<RatePair>& pairs, std::span<const double> counts,
                 std::span<const double> exposures, const PairSpec& spec, const Work& work) {
  constexpr std::size_t piece_size = 64;
  const std::size_t pieces = (pairs.size() + piece_size - 1) / piece_size;
  work.workers.run(pieces, [&](std::size_t piece) {
    work.progress.check();
    const std::size_t end = std::min(pairs.size(), (piece + 1) * piece_size);
    for (std::size_t i = piece * piece_size; i < end; ++i)
      pairs[i] = compare(counts, exposures, pairs[i].first, pairs[i].second, spec);
  });
  std::vector<double> p_values;
  p_values.reserve(pairs.size());
  for (const auto& pair : pairs) p_values.push_back(pair.p_value);
  const auto adjusted = adjust_p_values(p_values, spec.adjust);
  for (std::size_t i = 0; i < pairs.size(); ++i) pairs[i].p_adjusted = adjusted[i];
}

RatePair unasked(std::size_t first, std::size_t second) { return {first, second, 0, 0, 0, 0, 0}; }

}  // namespace

double distance_part(Distance distance, double count, double expected) {
  if (distance == Distance::likelihood) return 2 * half_deviance(count, expected);
  return (count - expected) * (count - expected) / expected;
}

std::vector<double> equal_rates_counts(std::span<const double> counts, std::span<const double> exposures) {
  if (counts.size() != exposures.size())
    throw Refusal(Code::length_mismatch, "count and exposure are of different length.",
                  {{"count"}, {"exposure"}});
  if (counts.size() < 2)
    throw Refusal(Code::too_few, "There is one group; a comparison needs two or more.", {{"group"}});
  for (std::size_t i = 0; i < counts.size(); ++i) {
    require_count(counts[i], "count", i + 1);
    require_exposure(exposures[i], "exposure", i + 1);
  }
  const double events = sum(counts), exposure = sum(exposures);
  std::vector<double> expected(exposures.begin(), exposures.end());
  for (double& e : expected) e = e / exposure * events;
  return expected;
}

ManyRatesTest many_rates_test(std::span<const double> counts, std::span<const double> exposures,
                              Distance distance) {
  const auto expected = equal_rates_counts(counts, exposures);
  const auto df = static_cast<double>(counts.size() - 1);
  if (!(sum(counts) > 0)) return {0, df, 1, 0, ChanceBy::chi_square};
  Sum statistic;
  for (std::size_t i = 0; i < counts.size(); ++i)
    statistic.add(distance_part(distance, counts[i], expected[i]));
  return {statistic.value(), df, chi_square_above(statistic.value(), df), 0, ChanceBy::chi_square};
}

std::vector<RatePair> all_pairs(std::span<const double> counts, std::span<const double> exposures,
                                const PairSpec& spec, const Work& work) {
  equal_rates_counts(counts, exposures);  // refuses what cannot be compared
  std::vector<RatePair> pairs;
  pairs.reserve(counts.size() * (counts.size() - 1) / 2);
  for (std::size_t i = 0; i < counts.size(); ++i)
    for (std::size_t j = i + 1; j < counts.size(); ++j) pairs.push_back(unasked(i, j));
  compare_all(pairs, counts, exposures, spec, work);
  return pairs;
}

std::vector<RatePair> pairs_against(std::span<const double> counts, std::span<const double> exposures,
                                    std::size_t reference, const PairSpec& spec, const Work& work) {
  equal_rates_counts(counts, exposures);
  if (reference >= counts.size()) throw Refusal(Code::bad_value, "The reference is not one of the groups.");
  std::vector<RatePair> pairs;
  for (std::size_t i = 0; i < counts.size(); ++i)
    if (i != reference) pairs.push_back(unasked(i, reference));
  compare_all(pairs, counts, exposures, spec, work);
  return pairs;
}

}  // namespace countsel
