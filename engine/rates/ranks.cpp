// engine/rates/ranks.cpp -- ranks of the shrunk rates, and their distribution over posterior draws.
#include "engine/rates/ranks.hpp"

#include <algorithm>
#include <array>
#include <bit>
#include <cmath>
#include <limits>
#include <numeric>

#include "engine/rates/count_fits_rows.hpp"
#include "engine/refusal.hpp"

namespace countsel {
namespace {

constexpr double nan = std::numeric_limits<double>::quiet_NaN();
constexpr std::size_t most_draws_in_all = 40'000'000;

// Places from the highest value down; ties share the middle of theirs.
std::vector<double> places(std::span<const double> values) {
  std::vector<std::uint32_t> order(values.size());
  std::iota(order.begin(), order.end(), 0U);
  std::sort(order.begin(), order.end(), [&](std::uint32_t a, std::uint32_t b) {
    return values[a] != values[b] ? values[a] > values[b] : a < b;
  });
  std::vector<double> place(values.size());
  for (std::size_t i = 0; i < order.size();) {
    std::size_t end = i + 1;
    while (end < order.size() && values[order[end]] == values[order[i]]) ++end;
    for (std::size_t k = i; k < end; ++k) place[order[k]] = static_cast<double>(i + end + 1) / 2;
    i = end;
  }
  return place;
}

// Ranks 1 for the highest value. Sorted by three counting passes over the bits of a single-precision copy,
// whose order is that of the numbers where they are positive; two rates alike to seven digits keep their
// order.
class Ranker {
 public:
  explicit Ranker(std::size_t units) : from_(units), to_(units) {}

  /// `relative` rates, over a typical one, so that they fit single precision.
  void rank(std::span<const double> relative, std::span<std::uint32_t> ranks) {
    constexpr double least = 1e-30, most = 1e30;
    for (std::size_t i = 0; i < relative.size(); ++i) {
      const auto bits =
          std::bit_cast<std::uint32_t>(static_cast<float>(std::clamp(relative[i], least, most)));
      from_[i] = std::uint64_t{~bits} << 32 | i;
    }
    for (const int shift : {32, 43, 54}) pass(shift);
    for (std::size_t i = 0; i < from_.size(); ++i)
      ranks[static_cast<std::uint32_t>(from_[i])] = static_cast<std::uint32_t>(i + 1);
  }

 private:
  void pass(int shift) {
    std::array<std::uint32_t, 2049> starts{};
    const auto digit = [shift](std::uint64_t key) { return (key >> shift) & 2047; };
    for (const std::uint64_t key : from_) ++starts[digit(key) + 1];
    std::partial_sum(starts.begin(), starts.end(), starts.begin());
    for (const std::uint64_t key : from_) to_[starts[digit(key)]++] = key;
    from_.swap(to_);
  }

  std::vector<std::uint64_t> from_, to_;
};

}  // namespace

std::size_t default_draws(std::size_t units) {
  return std::clamp<std::size_t>(1'200'000 / std::max<std::size_t>(units, 1), 250, 2000);
}

UnitRanks rank_units(std::span<const double> counts, std::span<const double> exposures,
                     const UnitRatePrior& prior, const RanksSpec& spec, const Work& work) {
  require_count_rows({counts, exposures, {}});
  if (!(spec.confidence > 0 && spec.confidence < 1))
    throw Refusal(Code::bad_value, "The confidence must lie between 0 and 1.");
  const std::size_t n = counts.size();
  UnitRanks result;
  if (prior.no_spread) {
    const double middle = static_cast<double>(n + 1) / 2;
    result.rank.assign(n, middle);
    result.mean_rank.assign(n, middle);
    result.low.assign(n, 1);
    result.high.assign(n, static_cast<double>(n));
    return result;
  }
  std::vector<double> shrunk(n);
  for (std::size_t i = 0; i < n; ++i) shrunk[i] = (prior.shape + counts[i]) / (prior.rate + exposures[i]);
  result.rank = places(shrunk);
  result.mean_rank.assign(n, nan);
  result.low.assign(n, nan);
  result.high.assign(n, nan);
  if (n > most_ranked_units) return result;
  const std::size_t draws = spec.draws == 0 ? default_draws(n) : spec.draws;
  if (draws > most_draws_in_all / n)
    throw Refusal(Code::too_large, "So many draws for so many units are too much.", {},
                  "Ask for fewer draws, or leave their number to the program.");
  result.draws = draws;

  // ranks[unit * draws + draw]
  std::vector<std::uint32_t> ranks(n * draws);
  constexpr std::size_t together = 16;
  const std::size_t pieces = (draws + together - 1) / together;
  work.workers.run(pieces, [&](std::size_t piece) {
    Ranker ranker(n);
    const std::size_t first = piece * together, last = std::min(draws, first + together);
    std::vector<double> rates(n);
    std::vector<std::uint32_t> block(n * (last - first)), one(n);
    for (std::size_t draw = first; draw < last; ++draw) {
      work.progress.check();
      RandomStream stream(spec.seed, draw);
      for (std::size_t i = 0; i < n; ++i)
        rates[i] = draw_gamma(stream, prior.shape + counts[i]) / ((prior.rate + exposures[i]) * prior.mean);
      ranker.rank(rates, one);
      for (std::size_t i = 0; i < n; ++i) block[i * (last - first) + draw - first] = one[i];
    }
    for (std::size_t i = 0; i < n; ++i)
      std::copy_n(block.begin() + static_cast<std::ptrdiff_t>(i * (last - first)), last - first,
                  ranks.begin() + static_cast<std::ptrdiff_t>(i * draws + first));
  });

  // The order statistics that leave at most the tail's share of the draws outside.
  const double tail = (1 - spec.confidence) / 2;
  const auto outside = static_cast<std::size_t>(std::floor(tail * static_cast<double>(draws) * (1 + 1e-12)));
  for (std::size_t i = 0; i < n; ++i) {
    const auto begin = ranks.begin() + static_cast<std::ptrdiff_t>(i * draws);
    const auto end = begin + static_cast<std::ptrdiff_t>(draws);
    std::uint64_t total = 0;
    for (auto rank = begin; rank != end; ++rank) total += *rank;
    result.mean_rank[i] = static_cast<double>(total) / static_cast<double>(draws);
    const auto low = begin + static_cast<std::ptrdiff_t>(outside),
               high = end - 1 - static_cast<std::ptrdiff_t>(outside);
    std::nth_element(begin, low, end);
    result.low[i] = std::min<double>(*low, result.rank[i]);
    std::nth_element(low, high, end);
    result.high[i] = std::max<double>(*high, result.rank[i]);
  }
  return result;
}

}  // namespace countsel
