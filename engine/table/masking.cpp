// engine/table/masking.cpp -- withholding in a list with its total.
#include "engine/table/masking.hpp"

#include <algorithm>
#include <cmath>
#include <limits>
#include <numeric>

#include "engine/numbers/sums.hpp"
#include "engine/refusal.hpp"
#include "engine/table/masking_checks.hpp"

namespace countsel {
namespace {

constexpr double infinity = std::numeric_limits<double>::infinity();

// Whether each withheld count could be two different numbers: its bounds given the others' bounds and their
// sum. One equation between whole numbers, so the bounds are reached.
bool all_open(std::span<const double> counts, const std::vector<Shown>& shown, double threshold) {
  // Kept back are the smallest that are not small, so none exceeds the least one shown.
  double least_shown = infinity;
  for (std::size_t i = 0; i < counts.size(); ++i)
    if (shown[i] == Shown::plain) least_shown = std::min(least_shown, counts[i]);
  Sum hidden, least, most;
  std::size_t unbounded = 0;
  for (std::size_t i = 0; i < counts.size(); ++i) {
    if (shown[i] == Shown::plain) continue;
    hidden.add(counts[i]);
    if (shown[i] == Shown::small) {
      most.add(threshold - 1);
    } else {
      least.add(threshold);
      if (std::isinf(least_shown)) {
        ++unbounded;
      } else {
        most.add(least_shown);
      }
    }
  }
  for (const Shown kind : {Shown::small, Shown::kept_back}) {
    if (std::find(shown.begin(), shown.end(), kind) == shown.end()) continue;
    const double low = kind == Shown::small ? 0 : threshold;
    const double high = kind == Shown::small ? threshold - 1 : least_shown;
    const bool others_unbounded = unbounded > (std::isinf(high) ? 1 : 0);
    const double others_most = others_unbounded ? infinity : most.value() - (std::isinf(high) ? 0 : high);
    const double others_least = least.value() - low;
    const double from = std::max(low, hidden.value() - others_most),
                 to = std::min(high, hidden.value() - others_least);
    if (!(from < to)) return false;
  }
  return true;
}

}  // namespace

MaskedList mask_list(std::span<const double> counts, double threshold, bool total_shown) {
  require_threshold(threshold);
  require_counts(counts);
  MaskedList list;
  list.counts.assign(counts.size(), Shown::plain);
  std::vector<std::size_t> others;
  for (std::size_t i = 0; i < counts.size(); ++i) {
    if (counts[i] < threshold) {
      list.counts[i] = Shown::small;
    } else {
      others.push_back(i);
    }
  }
  if (!total_shown || others.size() == counts.size()) return list;
  if (sum(counts) < threshold) {
    list.total = Shown::small;
    return list;
  }
  // Equal counts keep their order, so that the same data are always masked alike.
  std::stable_sort(others.begin(), others.end(),
                   [&](std::size_t a, std::size_t b) { return counts[a] < counts[b]; });
  for (const std::size_t next : others) {
    if (all_open(counts, list.counts, threshold)) return list;
    list.counts[next] = Shown::kept_back;
  }
  if (!all_open(counts, list.counts, threshold)) list.total = Shown::kept_back;
  return list;
}

}  // namespace countsel
