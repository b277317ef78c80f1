// engine/rates/many_rates_simulate.cpp -- equal rates given the sum: enumerated or drawn.
#include <algorithm>
#include <cmath>

#include "engine/numbers/sums.hpp"
#include "engine/rates/many_rates_parts.hpp"
#include "engine/refusal.hpp"

namespace countsel {
namespace {

constexpr std::uint64_t draws_to_a_piece = 250;

// Distances of small counts are looked up: most cells of most draws are small.
struct DistanceTable {
  static constexpr std::size_t kept = 64;
  std::span<const double> expected;
  Distance measure;
  std::vector<double> small;

  DistanceTable(std::span<const double> means, Distance distance) : expected(means), measure(distance) {
    if (means.size() > 20000) return;
    small.reserve(means.size() * kept);
    for (const double e : means)
      for (std::size_t k = 0; k < kept; ++k)
        small.push_back(distance_part(measure, static_cast<double>(k), e));
  }
  double operator()(std::size_t group, double count) const {
    if (!small.empty() && count < kept) return small[group * kept + static_cast<std::size_t>(count)];
    return distance_part(measure, count, expected[group]);
  }
};

}  // namespace

ManyRatesTest conditional_rates_test(std::span<const double> counts, std::span<const double> exposures,
                                     const ConditionalSpec& spec, const Work& work) {
  ManyRatesTest test = many_rates_test(counts, exposures, spec.distance);
  if (spec.draws == 0)
    throw Refusal(Code::bad_value, "A simulated test needs one draw or more.", {{"draws"}});
  const double events = sum(counts);
  const auto expected = equal_rates_counts(counts, exposures);
  // The walk goes as deep as there are groups; its tables hold every count of every group.
  const bool fits = counts.size() <= 1000 && events * static_cast<double>(counts.size()) < 1e7;
  if (events == 0 || (fits && ways_to_share(events, counts.size()) <= spec.most_outcomes)) {
    test.by = ChanceBy::enumeration;
    if (events > 0) test.p_value = enumerated_chance(expected, events, spec.distance, test.statistic, work);
    return test;
  }
  const auto chances = conditional_chances(exposures);
  const DistanceTable distance(expected, spec.distance);
  const double bound = test.statistic - 1e-9 * (1 + test.statistic);
  const std::uint64_t pieces = (spec.draws + draws_to_a_piece - 1) / draws_to_a_piece;
  std::vector<std::uint64_t> as_large(pieces);
  work.workers.run(pieces, [&](std::size_t piece) {
    RandomStream stream(spec.seed, piece);
    std::vector<double> drawn(counts.size());
    const std::uint64_t draws = std::min(draws_to_a_piece, spec.draws - piece * draws_to_a_piece);
    for (std::uint64_t i = 0; i < draws; ++i) {
      work.progress.check();
      draw_multinomial(stream, events, chances, drawn);
      double total = 0;
      for (std::size_t group = 0; group < drawn.size(); ++group) total += distance(group, drawn[group]);
      if (total >= bound) ++as_large[piece];
    }
  });
  double count = 0;
  for (const std::uint64_t piece : as_large) count += static_cast<double>(piece);
  const auto draws = static_cast<double>(spec.draws);
  test.by = ChanceBy::simulation;
  test.p_value = (1 + count) / (1 + draws);
  test.p_error = std::sqrt(test.p_value * (1 - test.p_value) / draws);
  return test;
}

}  // namespace countsel
