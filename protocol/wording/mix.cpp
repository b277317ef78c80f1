// protocol/wording/mix.cpp -- crude beside adjusted, and which way each points.
#include "protocol/wording/mix.hpp"

#include <algorithm>
#include <cmath>

#include "protocol/wording/numbers.hpp"
#include "protocol/wording/rates.hpp"

namespace countsel {
namespace {

std::string level_words(const Wording& wording, const SaidMix& said) {
  return " (" + wording.level() + (said.side == Side::both ? " limits, " : " one-sided limit, ") +
         said.limits + ")";
}

/// "1.4 bursts per km-year, between 1.1 and 1.8" with its level; without limits only the value.
std::string with_limits(const Wording& wording, const SaidMix& said, double value, double low, double high,
                        const std::string& unit = "") {
  if (std::isnan(low) || std::isnan(high))
    return significant_text(value, 2) + unit + ", without limits by this method";
  if (value == 0 || !std::isfinite(value))
    return wording.limits(value, low, high) + unit + level_words(wording, said);
  return round_limits(value, low, high).value + unit + ", " + wording.limits(value, low, high) +
         level_words(wording, said);
}

std::string one_direct(const Wording& wording, const SaidMix& said) {
  const auto& rate = said.rates[0];
  return capital(wording.counted(rate.count)) + " in " + wording.observed(rate.exposure) + wording.period() +
         ": with " + the_mix(said.stratum) + " that the weights have, the rate would be " +
         with_limits(wording, said, rate.rate * said.per, rate.low * said.per, rate.high * said.per,
                     " " + wording.rate_unit()) +
         "; as it stands it is " + significant_text(rate.crude_rate * said.per, 3) + ".";
}

std::string one_indirect(const Wording& wording, const SaidMix& said) {
  const auto& rate = said.rates[0];
  std::string text = capital(wording.counted(rate.count)) + wording.period() +
                     " where the standard's rates, at " + the_mix(said.stratum) +
                     " found here, lead to expect " + significant_text(rate.expected, 3);
  if (std::isnan(rate.ratio)) return text + ": nothing happened and nothing was expected.";
  return text + ": a ratio of " + with_limits(wording, said, rate.ratio, rate.ratio_low, rate.ratio_high) +
         ".";
}

std::string two_direct(const Wording& wording, const SaidMix& said) {
  const std::size_t other = 1 - said.reference;
  const auto& rate = said.rates[other];
  const auto& base = said.rates[said.reference];
  std::string text = "As if " + the_mix(said.stratum) + " were the same, the rate in " + said.groups[other] +
                     " is " + significant_text(rate.rate * said.per, 2) + " " + wording.rate_unit() +
                     " against " + significant_text(base.rate * said.per, 2) + " in " +
                     said.groups[said.reference] + wording.period();
  if (std::isnan(rate.ratio)) return text + ": nothing happened in either.";
  text += ": a ratio of " + with_limits(wording, said, rate.ratio, rate.ratio_low, rate.ratio_high);
  const double crude = rate.crude_rate / base.crude_rate;
  return text + (std::isfinite(crude) ? "; as they stand it is " + significant_text(crude, 3) + "." : ".");
}

std::string many_direct(const Wording& wording, const SaidMix& said) {
  std::vector<double> value, low, high;
  for (const auto& rate : said.rates) {
    value.push_back(rate.rate * said.per);
    low.push_back(rate.low * said.per);
    high.push_back(rate.high * said.per);
  }
  return capital(wording.rate_unit()) + " as if " + the_mix(said.stratum) + " were the same" +
         wording.period() + level_words(wording, said) + ". " +
         say_extremes(wording, said.groups, value, low, high);
}

/// Group by group and never ranked: each ratio has weights of its own.
std::string many_indirect(const Wording& wording, const SaidMix& said) {
  const std::string what = capital(wording.events()) +
                           " over those that the standard's rates lead to expect" + wording.period() +
                           level_words(wording, said) + ": ";
  std::vector<std::string> each, above, below;
  for (std::size_t g = 0; g < said.rates.size(); ++g) {
    const auto& rate = said.rates[g];
    each.push_back(said.groups[g] + " " + shown_limits(rate.ratio, rate.ratio_low, rate.ratio_high));
    if (rate.ratio_low > 1) above.push_back(said.groups[g]);
    if (rate.ratio_high < 1) below.push_back(said.groups[g]);
  }
  if (each.size() <= 4) return what + listed(each) + ".";
  const auto some = [](const std::vector<std::string>& groups) {
    return groups.empty() ? std::string("none") : listed(groups, 3);
  };
  return what + "above the standard with limits that leave out 1: " + some(above) +
         "; below: " + some(below) + ".";
}

}  // namespace

std::string the_mix(const std::string& column) {
  return column == "stratum" ? "the mix" : "the mix of " + column;
}

std::string say_mix(const Wording& wording, const SaidMix& said) {
  if (said.rates.size() == 1) return said.direct ? one_direct(wording, said) : one_indirect(wording, said);
  if (!said.direct) return many_indirect(wording, said);
  return said.rates.size() == 2 ? two_direct(wording, said) : many_direct(wording, said);
}

void note_mix(const Wording& wording, const SaidMix& said, std::vector<Note>& notes) {
  std::vector<std::string> few, turned;
  for (std::size_t g = 0; g < said.rates.size(); ++g) {
    if (said.rates[g].count < 10) few.push_back(said.groups[g]);
    if (!said.direct || said.rates.size() < 2 || g == said.reference) continue;
    const double crude = said.rates[g].crude_rate / said.rates[said.reference].crude_rate;
    if ((crude - 1) * (said.rates[g].ratio - 1) < 0) turned.push_back(said.groups[g]);
  }
  if (!few.empty()) {
    notes.push_back({"few_events", "Fewer than ten " + wording.events() +
                                       (said.groups.size() > 1 ? " in " + listed(few, 5) : std::string()) +
                                       ": a standardised rate of so few leans on which strata they fell in. "
                                       "Read its limits, or give the counts alone."});
  }
  if (!turned.empty()) {
    notes.push_back({"opposite_directions", "Crude and adjusted rates point in opposite directions for " +
                                                listed(turned, 5) + " against " +
                                                said.groups[said.reference] + ": the mix of " + said.stratum +
                                                " hides or makes the difference."});
  }
  if (!said.direct && said.rates.size() > 1) {
    notes.push_back(
        {"ratios_not_comparable",
         "Each ratio is weighted by its own group's mix. Divide no two of them and rank none: for a "
         R"(comparison between groups ask with "way":"direct".)"});
  }
}

std::string say_parts(const Wording& wording, const std::string& first, const std::string& reference,
                      double rate1, double rate0, const RateOrMix& parts, const std::string& stratum,
                      const std::string& method) {
  const double difference = parts.difference.value;
  const auto rounded = round_limits(difference, parts.difference.low, parts.difference.high);
  const auto between = [&](const Part& part) {
    const auto text = round_limits(part.value, part.low, part.high);
    if (std::isnan(part.low) || std::isnan(part.high)) return text.value;
    const bool low = std::isfinite(part.low), high = std::isfinite(part.high);
    return text.value + (low && high ? " (" + text.low + " to " + text.high + ")"
                         : high      ? " (at most " + text.high + ")"
                                     : " (at least " + text.low + ")");
  };
  std::string text = capital(first) + " has " + significant_text(rate1, 3) + " " + wording.rate_unit() +
                     ", " + reference + " " + significant_text(rate0, 3) + wording.period() +
                     ": a difference of " + rounded.value + ". ";
  return text + "Of that, " + between(parts.rate) + " comes from the rates within " +
         (stratum == "stratum" ? "strata" : stratum) + " and " + between(parts.mix) + " from " +
         the_mix(stratum) + " (" + wording.level() + " limits, " + method + ").";
}

}  // namespace countsel
