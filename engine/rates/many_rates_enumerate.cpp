// engine/rates/many_rates_enumerate.cpp -- every way to share the events out, weighed by its chance.
//
// A multinomial chance is a product of Poisson chances over the Poisson chance of the sum, and distance
// and log chance are both sums over the groups: a table for each group, a walk over all outcomes.
#include <cmath>
#include <cstdint>

#include "engine/numbers/poisson_deviance.hpp"
#include "engine/rates/many_rates_parts.hpp"

namespace countsel {
namespace {

struct Cell {
  double distance, log_chance;
};

struct Walk {
  std::vector<std::vector<Cell>> tables;  // group x count
  std::vector<Cell> all_zero;             // what the groups from here on add when no event is left
  double bound;                           // distances at least this large are counted
  const Work& work;
  double chance = 0;
  std::uint64_t visited = 0;

  void share_out(std::size_t group, std::size_t left, Cell so_far) {
    if (left == 0) {
      ++visited;
      if (so_far.distance + all_zero[group].distance >= bound)
        chance += std::exp(so_far.log_chance + all_zero[group].log_chance);
      return;
    }
    if (group + 2 == tables.size()) {
      last_two(left, so_far);
      return;
    }
    for (std::size_t k = 0; k <= left; ++k) {
      const Cell& cell = tables[group][k];
      share_out(group + 1, left - k, {so_far.distance + cell.distance, so_far.log_chance + cell.log_chance});
    }
  }

  void last_two(std::size_t left, Cell so_far) {
    visited += left + 1;
    if (visited > 100000) {
      work.progress.check();
      visited = 0;
    }
    const auto& one = tables[tables.size() - 2];
    const auto& two = tables[tables.size() - 1];
    for (std::size_t k = 0; k <= left; ++k)
      if (so_far.distance + one[k].distance + two[left - k].distance >= bound)
        chance += std::exp(so_far.log_chance + one[k].log_chance + two[left - k].log_chance);
  }
};

}  // namespace

double ways_to_share(double events, std::size_t groups) {
  double ways = 1;
  for (std::size_t i = 1; i < groups && std::isfinite(ways); ++i)
    ways *= (events + static_cast<double>(i)) / static_cast<double>(i);
  return ways;
}

double enumerated_chance(std::span<const double> expected, double events, Distance measure, double distance,
                         const Work& work) {
  const auto n = static_cast<std::size_t>(events);
  Walk walk{{}, std::vector<Cell>(expected.size() + 1), distance - 1e-9 * (1 + distance), work};
  for (const double e : expected) {
    auto& table = walk.tables.emplace_back(n + 1);
    for (std::size_t k = 0; k <= n; ++k) {
      const auto count = static_cast<double>(k);
      table[k] = {distance_part(measure, count, e), log_poisson(count, e)};
    }
  }
  for (std::size_t group = expected.size(); group-- > 0;) {
    const Cell& rest = walk.all_zero[group + 1];
    const Cell& zero = walk.tables[group][0];
    walk.all_zero[group] = {rest.distance + zero.distance, rest.log_chance + zero.log_chance};
  }
  walk.share_out(0, n, {0, -log_poisson(events, events)});
  return std::fmin(1, walk.chance);
}

}  // namespace countsel
