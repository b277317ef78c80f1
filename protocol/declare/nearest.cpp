// protocol/declare/nearest.cpp -- optimal string alignment distance, by rows.
//
// Source: the recurrence with adjacent swaps of Damerau (1964), Communications of the ACM 7, 171-176,
// in its restricted form.
#include "protocol/declare/nearest.hpp"

#include <algorithm>
#include <cctype>

namespace countsel {

std::size_t edit_distance(std::string_view from, std::string_view to) {
  std::vector<std::size_t> before(to.size() + 1), last(to.size() + 1), row(to.size() + 1);
  for (std::size_t j = 0; j <= to.size(); ++j) last[j] = j;
  for (std::size_t i = 1; i <= from.size(); ++i) {
    row[0] = i;
    for (std::size_t j = 1; j <= to.size(); ++j) {
      const std::size_t same = from[i - 1] == to[j - 1] ? 0 : 1;
      row[j] = std::min({last[j] + 1, row[j - 1] + 1, last[j - 1] + same});
      if (i > 1 && j > 1 && from[i - 1] == to[j - 2] && from[i - 2] == to[j - 1]) {
        row[j] = std::min(row[j], before[j - 2] + 1);
      }
    }
    before = last;
    last = row;
  }
  return last[to.size()];
}

std::string nearest(std::string_view unknown, const std::vector<std::string>& known) {
  const auto lower = [](std::string_view text) {
    std::string out(text.substr(0, 64));
    std::transform(out.begin(), out.end(), out.begin(),
                   [](unsigned char c) { return static_cast<char>(std::tolower(c)); });
    return out;
  };
  const std::string wanted = lower(unknown);
  std::string best;
  std::size_t best_distance = std::max<std::size_t>(2, wanted.size() / 3) + 1;
  for (const auto& name : known) {
    const std::string candidate = lower(name);
    auto distance = edit_distance(wanted, candidate);
    // A name that only lacks its other words ("material" for "pipe_material") is near as well.
    if (wanted.size() >= 3 && candidate.size() >= 3 &&
        (candidate.find(wanted) != std::string::npos || wanted.find(candidate) != std::string::npos)) {
      distance = std::min<std::size_t>(distance, 2);
    }
    if (distance < best_distance) {
      best_distance = distance;
      best = name;
    }
  }
  return best;
}

}  // namespace countsel
