// protocol/wording/comparison.cpp -- the ratio first, then chance, then what could have been seen.
#include "protocol/wording/comparison.hpp"

#include <cmath>

#include "protocol/wording/numbers.hpp"

namespace countsel {
namespace {

bool excludes(double low, double high, double value) { return low > value || high < value; }

std::string could_have(const SaidComparison& said) {
  const bool above = !std::isnan(said.could_show), below = !std::isnan(said.could_show_below);
  if (!above && !below) return "";
  std::string text = " With so few events, only a ratio of ";
  if (above) text += significant_text(said.could_show, 2) + " or more";
  if (above && below) text += ", or of ";
  if (below) text += significant_text(said.could_show_below, 2) + " or less";
  return text + " would probably have shown.";
}

}  // namespace

std::string say_comparison(const Wording& wording, const SaidComparison& said) {
  const auto& d = said.data;
  const auto rate = [&](double count, double exposure) {
    return significant_text(count / exposure * said.per, 2);
  };
  std::string text = capital(said.first) + ": " + wording.counted(d.count1) + " in " +
                     wording.observed(d.exposure1) + " (" + rate(d.count1, d.exposure1) + " " +
                     wording.rate_unit() + "); " + said.reference + ": " + wording.counted(d.count0) +
                     " in " + wording.observed(d.exposure0) + " (" + rate(d.count0, d.exposure0) + ")" +
                     wording.period() + ".";
  if (d.count1 == 0 && d.count0 == 0) {
    return text + " Nothing happened in either group, so nothing can be said about which is higher.";
  }
  const std::string level = " (" + wording.level() +
                            (said.side == Side::both ? " limits, " : " one-sided limit, ") + said.limits +
                            ")";
  const auto rounded = round_limits(said.ratio, said.ratio_low, said.ratio_high);
  const bool no_limits = std::isnan(said.ratio_low) || std::isnan(said.ratio_high);
  text += " The rate in " + said.first + " is ";
  if (!std::isfinite(said.ratio)) {
    text += no_limits ? "above one of 0; this method has no limits here."
                      : wording.limits(said.ratio, said.ratio_low, said.ratio_high) + " times that in " +
                            said.reference + level + ".";
  } else if (said.ratio == 0) {
    text += no_limits ? "0; this method has no limits for its ratio."
                      : wording.limits(0, said.ratio_low, said.ratio_high) + " times that in " +
                            said.reference + level + ".";
  } else {
    text += rounded.value + " times that in " + said.reference + ", " +
            (no_limits ? "without limits by this method."
                       : wording.limits(said.ratio, said.ratio_low, said.ratio_high) + level + ".");
  }
  const std::string p =
      p_said(said.p_value) + ", " + said.test + (said.direction == Direction::either ? "" : ", one-sided");
  if (said.p_value < said.level) {
    text += " Chance alone is an unlikely explanation (" + p + ").";
    const double extra = d.count1 - d.count0 / d.exposure0 * d.exposure1;
    if (std::isfinite(extra) && std::abs(extra) >= 1) {
      text += " That is about " + significant_text(std::abs(extra), 2) + (extra > 0 ? " more " : " fewer ") +
              wording.events() + " than the other rate would have given in the same " +
              wording.exposure_name() + ".";
    }
  } else {
    text += " Chance alone could well explain the difference (" + p + ").";
    if (d.count1 + d.count0 < 100) text += could_have(said);
  }
  return text;
}

void note_comparison(const Wording& wording, const SaidComparison& said, const Limits& first_rate,
                     const Limits& reference_rate, std::vector<Note>& notes) {
  const bool ratio_shows = excludes(said.ratio_low, said.ratio_high, 1);
  const bool difference_shows = excludes(said.difference_low, said.difference_high, 0);
  const bool have_both = !std::isnan(said.ratio_low) && !std::isnan(said.difference_low);
  if (have_both && ratio_shows != difference_shows) {
    notes.push_back({"verdicts_differ",
                     std::string("The ratio's limits ") + (ratio_shows ? "leave out 1" : "include 1") +
                         " while the difference's " + (difference_shows ? "leave out 0" : "include 0") +
                         ": two methods near the edge. The sentence follows the ratio."});
  }
  const bool overlap = first_rate.low <= reference_rate.high && reference_rate.low <= first_rate.high;
  if (said.side == Side::both && ratio_shows && overlap) {
    notes.push_back(
        {"limits_overlap",
         "The two rates' own " + wording.level() +
             " limits overlap, and yet the ratio's leave out 1. Overlap of separate limits does not mean "
             "no difference: read the ratio's."});
  }
}

}  // namespace countsel
