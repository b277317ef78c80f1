// protocol/wording/units.cpp -- chance first, names second, and no verdicts.
#include "protocol/wording/units.hpp"

#include <algorithm>
#include <cmath>

#include "protocol/wording/numbers.hpp"

namespace countsel {
namespace {

std::string units(std::size_t n) {
  return given_text(static_cast<double>(n)) + (n == 1 ? " unit" : " units");
}

/// "about 1", "about 12", "fewer than 1": how many of n lie outside a band by chance, at most.
std::string by_chance(std::size_t n, double band) {
  const double expected = static_cast<double>(n) * (1 - band);
  return expected < 1 ? "fewer than 1" : "up to about " + given_text(std::round(expected));
}

std::string with_side(const SaidUnits& said, std::size_t i) {
  const bool high = said.funnel.ratio[i] > 1;
  return said.labels[i] + (high ? " (high)" : " (low)");
}

}  // namespace

std::string standing_name(Standing standing) {
  switch (standing) {
    case Standing::low:
      return "low";
    case Standing::high:
      return "high";
    case Standing::far_low:
      return "far low";
    case Standing::far_high:
      return "far high";
    default:
      return "within";
  }
}

std::string say_units(const SaidUnits& said) {
  const auto& funnel = said.funnel;
  const std::size_t n = said.labels.size();
  const bool widened =
      funnel.model.widening != Widening::none &&
      (funnel.model.widening == Widening::scaled ? funnel.model.dispersion > 1 : funnel.model.between_sd > 0);
  std::string text = "Of " + units(n) + ", ";
  const auto outside = [](std::size_t k) {
    return k == 0 ? std::string("none") : given_text(static_cast<double>(k));
  };
  text += outside(funnel.beyond_inner) +
          (funnel.beyond_inner == 1   ? " lies"
           : funnel.beyond_inner == 0 ? " lies"
                                      : " lie") +
          " outside the " + percent_text(said.inner) + " limits round " + said.benchmark;
  text += " (" + std::string(widened ? "widened for the spread between units; " : "") +
          by_chance(n, said.inner) + " would by chance alone)";
  if (funnel.beyond_inner > 0) {
    text += " and " + outside(funnel.beyond_outer) + " outside the " + percent_text(said.outer) + " ones";
  }
  text += ".";
  std::vector<std::size_t> flagged;
  for (std::size_t i = 0; i < n; ++i) {
    if (said.p_adjusted[i] < said.level) flagged.push_back(i);
  }
  std::stable_sort(flagged.begin(), flagged.end(),
                   [&](std::size_t a, std::size_t b) { return funnel.p_value[a] < funnel.p_value[b]; });
  std::vector<std::string> names;
  for (const auto i : flagged) names.push_back(with_side(said, i));
  const std::string allowing =
      said.adjustment.empty() ? " Taken one by one, " : " Allowing for so many comparisons, ";
  const std::string how =
      said.adjustment.empty()
          ? " (p below " + given_text(std::round(said.level * 1e8) / 1e8) + ", unadjusted)."
          : " (p below " + given_text(std::round(said.level * 1e8) / 1e8) + " after " + said.adjustment +
                ").";
  if (flagged.empty()) return text + allowing + "none stands out" + how;
  return text + allowing + listed(names, 5) + (flagged.size() == 1 ? " stands out" : " stand out") + how;
}

void note_units(const SaidUnits& said, std::vector<Note>& notes) {
  const auto& funnel = said.funnel;
  std::size_t too_small = 0;
  for (const double mean : funnel.expected) {
    const double shape = funnel.model.shape(mean);
    const double zero = std::isinf(shape) ? std::exp(-mean) : std::exp(-shape * std::log1p(mean / shape));
    too_small += 2 * zero >= 1 - said.inner;
  }
  if (too_small > 0) {
    notes.push_back(
        {"too_small_to_be_low",
         units(too_small) + (too_small == 1 ? " is" : " are") +
             " so small that even a count of 0 would lie within the limits: there, nothing low can "
             "be seen."});
  }
  if (funnel.model.widening == Widening::scaled) {
    notes.push_back(
        {"spread",
         "The limits are widened by a dispersion of " +
             significant_text(std::max(1.0, funnel.spread.dispersion), 3) +
             (funnel.spread.dispersion > 1 ? "." : ", so not at all: no more spread than chance is found.")});
  } else if (funnel.model.widening == Widening::added) {
    notes.push_back({"spread", funnel.spread.between_sd > 0
                                   ? "The limits are widened for units whose rates differ by about " +
                                         significant_text(100 * std::expm1(funnel.spread.between_sd), 2) +
                                         "% from one to the next (standard deviation " +
                                         significant_text(funnel.spread.between_sd, 2) + " on the log scale)."
                                   : "The limits are not widened: no more spread than chance is found."});
    if (!funnel.spread.on_log_scale && funnel.spread.between_sd > 0) {
      notes.push_back({"many_zeros",
                       "So many units have no events that the spread was found from counts less their "
                       "expected numbers, not from logarithms of ratios."});
    }
  }
  notes.push_back(
      {"no_verdict",
       "Outside the limits means: look here first. Differences in who is served, what is reported "
       "and how it is counted come before any other reading."});
}

void note_ranks(const std::vector<std::string>& labels, const UnitRanks& ranks, const UnitRatePrior& prior,
                const std::string& level, std::vector<Note>& notes) {
  if (prior.no_spread) {
    notes.push_back(
        {"no_spread",
         "The counts show no spread between units beyond chance, so each is given the common rate "
         "and no unit can be ranked above another."});
    return;
  }
  const auto first =
      static_cast<std::size_t>(std::min_element(ranks.rank.begin(), ranks.rank.end()) - ranks.rank.begin());
  if (std::isnan(ranks.low[first])) {
    notes.push_back({"ranks_not_drawn",
                     "There are too many units for limits of their ranks; the ranks alone say little."});
    return;
  }
  if (ranks.low[first] == ranks.high[first]) {
    notes.push_back({"ranks", labels[first] + " keeps its rank, " + given_text(ranks.rank[first]) + " of " +
                                  given_text(static_cast<double>(labels.size())) + ", within the " + level +
                                  " limits; others may not: read their rank's limits, not the rank."});
    return;
  }
  notes.push_back({"ranks", "A rank is a poor guide: " + labels[first] +
                                " has the highest rate after shrinkage, and its rank may be anything from " +
                                given_text(ranks.low[first]) + " to " + given_text(ranks.high[first]) +
                                " of " + given_text(static_cast<double>(labels.size())) + " (" + level +
                                " limits)."});
}

}  // namespace countsel
