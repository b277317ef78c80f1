// protocol/masking/other_counts.cpp -- one event moved from one withheld count to another, in pairs.
#include "protocol/masking/other_counts.hpp"

#include <algorithm>
#include <limits>

namespace countsel {
namespace {

struct Bounds {
  double low, high;
};

/// The withheld counts of a list, and how far each could go.
struct Withheld {
  std::vector<std::size_t> at;
  std::vector<double> counts;
  std::vector<Bounds> bounds;
};

Withheld withheld(std::span<const double> counts, const std::vector<Shown>& shown, double threshold) {
  // Kept back are the smallest that are not small, so none exceeds the least one shown.
  double least_shown = std::numeric_limits<double>::infinity();
  for (std::size_t i = 0; i < counts.size(); ++i)
    if (shown[i] == Shown::plain && counts[i] == counts[i]) least_shown = std::min(least_shown, counts[i]);
  Withheld all;
  for (std::size_t i = 0; i < counts.size(); ++i) {
    if (shown[i] == Shown::plain) continue;
    all.at.push_back(i);
    all.counts.push_back(counts[i]);
    all.bounds.push_back(shown[i] == Shown::small ? Bounds{0, threshold - 1}
                                                  : Bounds{threshold, least_shown});
  }
  return all;
}

/// Pairs of which one gives an event to the other, as many at once as there are; false if none.
bool exchange(const Withheld& all, std::vector<char>& covered, std::vector<double>& change) {
  const std::size_t n = all.at.size();
  // Those that still need a change come first as partners too.
  std::vector<std::size_t> order;
  for (std::size_t i = 0; i < n; ++i)
    if (!covered[i]) order.push_back(i);
  const std::size_t open = order.size();
  for (std::size_t i = 0; i < n; ++i)
    if (covered[i]) order.push_back(i);
  const auto room = [&](std::size_t i, double step) {
    if (change[i] * step < 0) return false;
    const double then = all.counts[i] + change[i] + step;
    return then >= all.bounds[i].low && then <= all.bounds[i].high;
  };
  bool any = false;
  std::size_t givers = 0, takers = 0;  // places in `order`; what is behind them has no room left
  const auto partner = [&](std::size_t& from, double step, std::size_t self) {
    while (from < n && !room(order[from], step)) ++from;
    std::size_t at = from;
    while (at < n && (order[at] == self || !room(order[at], step))) ++at;
    return at < n ? order[at] : n;
  };
  for (std::size_t k = 0; k < open; ++k) {
    const std::size_t i = order[k];
    if (change[i] != 0) continue;
    std::size_t other = n;
    double step = 1;
    if (room(i, 1)) other = partner(givers, -1, i);
    if (other == n && room(i, -1)) {
      step = -1;
      other = partner(takers, 1, i);
    }
    if (other == n) continue;
    change[i] += step;
    change[other] -= step;
    any = true;
  }
  for (std::size_t i = 0; i < n; ++i)
    if (change[i] != 0) covered[i] = 1;
  return any;
}

}  // namespace

OtherCounts other_counts(std::span<const double> counts, const std::vector<Shown>& shown, double threshold,
                         bool same_sum, std::size_t most) {
  OtherCounts others;
  const Withheld all = withheld(counts, shown, threshold);
  if (all.at.empty()) return others;
  const auto add = [&](const std::vector<double>& change) {
    std::vector<double> whole(counts.size(), 0);
    for (std::size_t i = 0; i < all.at.size(); ++i) whole[all.at[i]] = change[i];
    others.changes.push_back(std::move(whole));
  };
  std::vector<double> change(all.at.size(), 0);
  if (!same_sum) {
    for (std::size_t i = 0; i < all.at.size(); ++i) {
      change[i] = all.counts[i] + 1 <= all.bounds[i].high ? 1 : -1;
      others.all_covered &= all.counts[i] + change[i] >= all.bounds[i].low;
    }
    add(change);
    return others;
  }
  std::vector<char> covered(all.at.size(), 0);
  while (others.changes.size() < most && std::find(covered.begin(), covered.end(), 0) != covered.end()) {
    change.assign(all.at.size(), 0);
    const auto before = std::count(covered.begin(), covered.end(), 1);
    if (!exchange(all, covered, change) || std::count(covered.begin(), covered.end(), 1) == before) break;
    add(change);
  }
  others.all_covered = std::find(covered.begin(), covered.end(), 0) == covered.end();
  return others;
}

}  // namespace countsel
