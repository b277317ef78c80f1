// protocol/wording/expected.cpp -- the count first, then what was expected, then chance.
#include "protocol/wording/expected.hpp"

#include <algorithm>
#include <cmath>

#include "protocol/wording/numbers.hpp"

namespace countsel {
namespace {

/// Three significant digits, without zeros that say nothing: "3", "8.2".
std::string expected_text(double expected) {
  std::string text = significant_text(expected, 3);
  if (text.find('.') == std::string::npos || text.find('e') != std::string::npos) return text;
  while (text.back() == '0') text.pop_back();
  if (text.back() == '.') text.pop_back();
  return text;
}

std::string opening(const Wording& wording, const SaidExpected& said) {
  const auto& all = said.all;
  std::string seen = capital(wording.counted(all.count));
  if (said.exposure_given || said.from == Expectation::target)
    seen += " in " + wording.observed(said.exposure);
  if (!said.exposure_given) seen += " (no exposure was given)";
  seen += wording.period();
  const bool one = all.expected == 1;
  switch (said.from) {
    case Expectation::number:
      return seen + " where " + given_text(all.expected) + (one ? " was" : " were") + " expected";
    case Expectation::target:
      if (std::isnan(said.target)) return seen + " where the targets allow " + expected_text(all.expected);
      return seen + ", " + significant_text(said.rate, 2) + " " + wording.rate_unit() +
             ", against a target of " + given_text(said.target) + ", which allows " +
             expected_text(all.expected);
    default:
      return seen + " where the past leads to expect " + expected_text(all.expected);
  }
}

std::string chance(const Wording& wording, const SaidExpected& said) {
  const std::string p = p_said(said.all.p_value) + ", " + said.test + " test" +
                        (said.direction == Direction::either ? "" : ", one-sided");
  if (said.all.p_value < said.level) {
    const double extra = said.all.count - said.all.expected;
    std::string text = " Chance alone is an unlikely explanation (" + p + ")";
    if (std::abs(extra) >= 1)
      text += "; that is about " + significant_text(std::abs(extra), 2) + (extra > 0 ? " more " : " fewer ") +
              wording.events() + " than expected";
    return text + ".";
  }
  std::string text = " Chance alone could well explain the difference (" + p + ")";
  const bool above = !std::isnan(said.could.above), below = !std::isnan(said.could.below);
  if (said.all.expected >= 100 || (!above && !below)) return text + ".";
  text += "; with so few expected, only a ratio of ";
  if (above) text += significant_text(said.could.above, 2) + " or more";
  if (above && below) text += ", or of ";
  if (below) text += significant_text(said.could.below, 2) + " or less";
  return text + " would probably have shown.";
}

}  // namespace

std::string say_expected(const Wording& wording, const SaidExpected& said) {
  const auto& all = said.all;
  std::string text = opening(wording, said);
  if (std::isnan(all.ratio)) return text + ": nothing happened and nothing was expected.";
  const std::string level = " (" + wording.level() +
                            (said.side == Side::both ? " limits, " : " one-sided limit, ") + said.limits +
                            ")";
  const bool no_limits = std::isnan(all.low) || std::isnan(all.high);
  if (!std::isfinite(all.ratio)) {
    text += ": the ratio is " + wording.limits(all.ratio, all.low, all.high) + level + ".";
  } else if (no_limits) {
    text +=
        ": " + significant_text(all.ratio, 2) + " times the expected number; this method has no limits here.";
  } else if (all.count == 0) {
    text += ": the ratio of the two is " + wording.limits(0, all.low, all.high) + level + ".";
  } else {
    text += ": " + round_limits(all.ratio, all.low, all.high).value + " times the expected number, " +
            wording.limits(all.ratio, all.low, all.high) + level + ".";
  }
  if (!std::isnan(all.p_value)) text += chance(wording, said);
  return text;
}

std::string say_beyond(const std::vector<std::string>& labels, const std::vector<ExpectedRatio>& rows,
                       const std::vector<double>& p_adjusted, double level, bool adjusted) {
  std::vector<std::string> above, below;
  for (std::size_t i = 0; i < rows.size(); ++i) {
    if (!(p_adjusted[i] < level)) continue;
    (rows[i].count > rows[i].expected ? above : below).push_back(labels[i]);
  }
  if (above.empty() && below.empty()) return "";
  std::string text = "Beyond chance" + std::string(adjusted ? " after adjustment" : " by themselves") + ": ";
  if (!above.empty()) text += listed(above, 5) + " above";
  if (!above.empty() && !below.empty()) text += "; ";
  if (!below.empty()) text += listed(below, 5) + " below";
  return text + " what was expected.";
}

}  // namespace countsel
