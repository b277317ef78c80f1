// protocol/wording/within.cpp -- crude and adjusted side by side, then the strata.
#include "protocol/wording/within.hpp"

#include <cmath>

#include "protocol/wording/mix.hpp"
#include "protocol/wording/numbers.hpp"

namespace countsel {
namespace {

/// Strata above and below no difference: with limits that leave it out, or by the estimate alone.
struct Sides {
  std::vector<std::string> above, below;
};

Sides sides_of(const SaidWithin& said, bool by_limits) {
  const double none = said.of_ratio ? 1 : 0;
  Sides sides;
  for (std::size_t i = 0; i < said.names.size(); ++i) {
    const auto& s = said.result.strata[i];
    if (by_limits ? s.low > none : s.estimate > none) sides.above.push_back(said.names[i]);
    if (by_limits ? s.high < none : s.estimate < none) sides.below.push_back(said.names[i]);
  }
  return sides;
}

std::string signed_limits(double low, double high, const RoundedLimits& text) {
  if (std::isfinite(low) && std::isfinite(high)) return "between " + text.low + " and " + text.high;
  return std::isfinite(high) ? "at most " + text.high : "at least " + text.low;
}

bool opposite(const SaidWithin& said) {
  const double none = said.of_ratio ? 1 : 0;
  return (said.result.crude - none) * (said.result.estimate - none) < 0;
}

}  // namespace

std::string say_within(const Wording& wording, const SaidWithin& said) {
  const auto& r = said.result;
  const double scale = said.of_ratio ? 1 : said.per;
  const double estimate = r.estimate * scale, low = r.low * scale, high = r.high * scale;
  const auto rounded = round_limits(estimate, low, high);
  const bool no_limits = std::isnan(low) || std::isnan(high);
  const std::string level = " (" + wording.level() +
                            (said.side == Side::both ? " limits, " : " one-sided limit, ") + said.limits +
                            ")";
  std::string text = "Compared within each " + said.column + wording.period() + ", the rate in " + said.first;
  if (said.of_ratio) {
    const std::string that = " times that in " + said.reference;
    if (no_limits) {
      text += (std::isfinite(estimate) ? " is " + significant_text(estimate, 2) + that
                                       : " is above that in " + said.reference + ", which is 0") +
              "; this method has no limits here";
    } else if (!std::isfinite(estimate) || estimate == 0) {
      text += " is " + wording.limits(estimate, low, high) + that + level;
    } else {
      text += " is " + rounded.value + that + ", " + wording.limits(estimate, low, high) + level;
    }
    if (std::isfinite(r.crude))
      text += "; with all thrown together it is " + significant_text(r.crude, 3) + " times";
  } else {
    text += " less that in " + said.reference + " is " + rounded.value + " " + wording.rate_unit();
    if (!no_limits) text += ", " + signed_limits(low, high, rounded) + level;
    text += "; with all thrown together it is " + significant_text(r.crude * scale, 3);
  }
  text += opposite(said) ? ", in the opposite direction." : ".";
  const std::string p = p_said(r.p_value) + ", Mantel-Haenszel test" +
                        (said.direction == Direction::either ? "" : ", one-sided");
  text += r.p_value < said.level ? " Chance alone is an unlikely explanation (" + p + ")."
                                 : " Chance alone could well explain the difference (" + p + ").";
  if (r.directions_differ) {
    const Sides sides = sides_of(said, true);
    text += " But the strata disagree: " + said.first + " is higher in " + listed(sides.above, 3) +
            " and lower in " + listed(sides.below, 3) + ", so one figure for all does not describe them.";
  }
  return text;
}

void note_within(const SaidWithin& said, std::vector<Note>& notes) {
  const auto& r = said.result;
  if (opposite(said)) {
    notes.push_back({"opposite_directions",
                     "The crude comparison points the other way: the groups differ in " +
                         the_mix(said.column) + ". The figure within strata compares like with like."});
  }
  if (r.homogeneity.p_value < 0.05) {
    const Sides sides = sides_of(said, false);
    std::string text = std::string("The ") + (said.of_ratio ? "ratios" : "differences") +
                       " vary between strata " + "more than chance would have them (" +
                       p_said(r.homogeneity.p_value) + "): read the strata rather than the one figure.";
    if (!sides.above.empty() && !sides.below.empty())
      text += " They lie on both sides: above in " + listed(sides.above, 4) + ", below in " +
              listed(sides.below, 4) + ".";
    notes.push_back({"strata_differ", std::move(text)});
  }
  const double none = said.of_ratio ? 1 : 0;
  const bool limits_show = r.low > none || r.high < none;
  if (said.side == Side::both && said.direction == Direction::either && !std::isnan(r.low) &&
      !std::isnan(r.high) && limits_show != (r.p_value < said.level)) {
    notes.push_back(
        {"verdicts_differ",
         std::string("The limits ") + (limits_show ? "leave out" : "include") +
             " no difference while the Mantel-Haenszel test does " + (r.p_value < said.level ? "" : "not ") +
             "show one: two methods near the edge. By the limits' own method " + p_said(r.method_p) + "."});
  }
}

}  // namespace countsel
