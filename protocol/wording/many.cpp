// protocol/wording/many.cpp -- the verdict on all groups before any pair.
#include "protocol/wording/many.hpp"

#include <algorithm>
#include <cmath>

#include "engine/numbers/sums.hpp"
#include "protocol/wording/numbers.hpp"

namespace countsel {

std::string say_differ(const Wording& wording, std::size_t groups, double count, double exposure,
                       const ManyRatesTest& test, const std::string& name, double level) {
  const std::string by = test.by == ChanceBy::enumeration  ? name + ", exact"
                         : test.by == ChanceBy::simulation ? name + ", simulated"
                                                           : name;
  const std::string p = p_said(test.p_value) + ", " + by;
  std::string text = capital(wording.counted(count)) + " in " + wording.observed(exposure) + " over " +
                     std::to_string(groups) + " groups" + wording.period() + ": ";
  const std::string rates = "their rates " + wording.per();
  return text +
         (test.p_value < level ? rates + " differ by more than chance alone would explain ("
                               : "chance alone could well explain how " + rates + " differ (") +
         p + ").";
}

std::string say_pairs(const std::vector<std::string>& groups, const std::vector<RatePair>& pairs,
                      double level, Adjust adjust) {
  std::vector<const RatePair*> apart;
  for (const auto& pair : pairs) {
    if (pair.p_adjusted < level) apart.push_back(&pair);
  }
  const std::string all = std::to_string(pairs.size());
  const std::string after =
      adjust == Adjust::none ? ", without adjustment for their number," : ", adjusted for their number,";
  if (pairs.size() == 1) return "";
  if (apart.empty()) return "Of " + all + " pairs" + after + " none differs beyond chance.";
  std::sort(apart.begin(), apart.end(),
            [](const RatePair* a, const RatePair* b) { return a->p_adjusted < b->p_adjusted; });
  std::vector<std::string> named;
  for (const auto* pair : apart) {
    const bool higher = !(pair->ratio < 1);
    named.push_back(groups[higher ? pair->first : pair->second] + " above " +
                    groups[higher ? pair->second : pair->first]);
  }
  return "Of " + all + " pairs" + after + " " + std::to_string(apart.size()) +
         (apart.size() == 1 ? " differs" : " differ") + " beyond chance: " + listed(named, 3) + ".";
}

void note_differ(const Wording& wording, const std::vector<double>& counts,
                 const std::vector<double>& exposures, const ManyRatesTest& test, double draws, double level,
                 std::vector<Note>& notes) {
  if (counts.size() == 2)
    notes.push_back({"two_groups", "With two groups, which_higher says by how much they differ."});
  if (test.by == ChanceBy::chi_square) {
    const double rate = sum(counts) / sum(exposures);
    const auto few =
        std::count_if(exposures.begin(), exposures.end(), [&](double e) { return e * rate < 5; });
    if (few > 0)
      notes.push_back(
          {"few_expected",
           "With equal rates fewer than 5 " + wording.events() + " would be expected in " +
               std::to_string(few) + " of the " + std::to_string(counts.size()) +
               " groups, where chi-square is a rough guide; \"test\":\"simulated\" does not lean on it."});
    return;
  }
  if (test.by == ChanceBy::enumeration) {
    notes.push_back({"enumerated", "The p-value is exact: every way to share the events out was looked at."});
    return;
  }
  std::string text = "The p-value comes from " + given_text(draws) + " draws; its standard error is " +
                     significant_text(test.p_error, 2) + ".";
  if (std::abs(test.p_value - level) < 2 * test.p_error)
    text += " That is as much as its distance from " + given_text(std::round(level * 1e9) / 1e9) +
            ": ask again with more \"draws\" before leaning on which side it falls.";
  notes.push_back({"simulated", std::move(text)});
}

}  // namespace countsel
