// protocol/questions/rate_or_mix.cpp -- how much of a difference is the rate, how much the mix?
#include <cmath>

#include "engine/numbers/sums.hpp"
#include "engine/rates/kitagawa.hpp"
#include "engine/rates/standardise.hpp"
#include "protocol/declare/comparison_options.hpp"
#include "protocol/declare/question.hpp"
#include "protocol/declare/shared_options.hpp"
#include "protocol/wording/mix.hpp"
#include "protocol/wording/rates.hpp"

namespace countsel {
namespace {

struct RateOrMixAsked : RateAsked {
  Role group, stratum;
  std::optional<std::string> reference;
  PartMethod limits = PartMethod::gamma;
  Side side = Side::both;
};

Source limits_source(PartMethod method) {
  if (method == PartMethod::normal)
    return {"normal limits of a weighted sum of Poisson counts, exposures fixed",
            "Breslow and Day, Statistical Methods in Cancer Research, vol. II, IARC 1987, section 2.2"};
  return {
      "gamma limits of the terms counted up and of those counted down, joined by recovering their variances",
      "Fay and Feuer, Statistics in Medicine 16 (1997) 791-801; Zou and Donner, Statistics in Medicine 27 "
      "(2008) 1693-1702"};
}
const Source split_source = {"split of the difference of two crude rates into rate and mix",
                             "Kitagawa, J. Amer. Statist. Assoc. 50 (1955) 1168-1194"};

struct Sides {
  std::vector<TwoRates> strata;
  double rate1 = 0, rate0 = 0, events = 0;
};

Sides sides_of(const RateOrMixAsked& asked, std::size_t first, std::size_t reference) {
  const auto table = tabulate(asked.count.numbers, asked.exposure.numbers, asked.group.codes,
                              asked.stratum.codes, 2, asked.stratum.levels.size());
  Sides sides;
  Sum count1, exposure1, count0, exposure0;
  for (std::size_t s = 0; s < table.strata; ++s) {
    const std::size_t one = table.at(first, s), base = table.at(reference, s);
    sides.strata.push_back(
        {table.counts[one], table.exposures[one], table.counts[base], table.exposures[base]});
    count1.add(table.counts[one]);
    exposure1.add(table.exposures[one]);
    count0.add(table.counts[base]);
    exposure0.add(table.exposures[base]);
  }
  sides.rate1 = count1.value() / exposure1.value();
  sides.rate0 = count0.value() / exposure0.value();
  sides.events = count1.value() + count0.value();
  return sides;
}

/// Bars for all strata together, with limits, then for each stratum.
Picture picture_of(const Wording& wording, const RateOrMix& parts, const std::vector<std::string>& names,
                   const std::vector<double>& rate, const std::vector<double>& mix, const std::string& title,
                   const std::string& column, double per) {
  std::vector<std::string> labels = {"all together"};
  labels.insert(labels.end(), names.begin(), names.end());
  const auto bars = [&](const std::string& name, const Part& all, const std::vector<double>& each) {
    Series series{.name = name,
                  .role = "bars",
                  .y = {all.value * per},
                  .low = {all.low * per},
                  .high = {all.high * per}};
    for (const double one : each) {
      series.y.push_back(one);
      series.low.push_back(NAN);
      series.high.push_back(NAN);
    }
    return series;
  };
  return {.kind = "bars",
          .title = title,
          .x_name = column,
          .x = std::move(labels),
          .y_name = "difference, " + wording.rate_unit(),
          .series = {bars("rate", parts.rate, rate), bars("mix", parts.mix, mix)},
          .lines = {{"no difference", 0}}};
}

Answer answer(const RateOrMixAsked& asked, Context&) {
  const auto [first, reference] = shared::two_groups(
      asked.group, asked.reference, "Add the rows of the other period or place, or ask how_often.",
      R"(Keep two with "only"; ask once for each pair.)");
  const Sides sides = sides_of(asked, first, reference);
  if (!(sides.events > 0)) {
    throw Refusal(Code::too_few, "Every count is 0; there is no difference to split.",
                  {{asked.count.column, 0}}, "Ask how_often for how high each rate could still be.");
  }
  const Wording wording(asked.words, asked.frame());
  const auto& names = asked.stratum.levels;
  const auto& one = asked.group.levels[first];
  const auto& base = asked.group.levels[reference];
  const double per = asked.per;
  const RateOrMix parts = rate_or_mix(sides.strata, asked.limits, asked.confidence, asked.side);
  std::vector<double> rate, mix;
  for (const auto& stratum : parts.strata) {
    rate.push_back(stratum.rate_part * per);
    mix.push_back(stratum.mix_part * per);
  }
  RateOrMix scaled = parts;
  for (Part* part : {&scaled.difference, &scaled.rate, &scaled.mix}) {
    part->value *= per;
    part->low *= per;
    part->high *= per;
  }
  Answer answer{.say =
                    say_parts(wording, one, base, sides.rate1 * per, sides.rate0 * per, scaled,
                              asked.stratum.column, asked.limits == PartMethod::gamma ? "gamma" : "normal")};
  answer.figures = {{"difference", scaled.difference.value},
                    {"rate_part", scaled.rate.value},
                    {"rate_low", scaled.rate.low},
                    {"rate_high", scaled.rate.high},
                    {"mix_part", scaled.mix.value},
                    {"mix_low", scaled.mix.low},
                    {"mix_high", scaled.mix.high}};
  if (names.size() == 1) {
    answer.notes.push_back({"one_stratum", "There is only one stratum, " + names[0] +
                                               ": nothing is left for the mix, and all is the rate."});
  }
  if (!parts.absent.empty()) {
    std::vector<std::string> absent;
    for (const auto s : parts.absent) absent.push_back(names[s]);
    answer.notes.push_back(
        {"absent_strata",
         listed(absent, 5) + (absent.size() == 1 ? " has" : " have") +
             " exposure on one side only: the share on the other is taken as 0 and the rate there "
             "as the same, so that all of the part is mix."});
  }
  if (scaled.rate.value * scaled.mix.value < 0) {
    answer.notes.push_back({"parts_oppose",
                            "Rate and mix pull in opposite directions: each is larger than what is "
                            "left of them in the difference, or hides part of the other."});
  }
  if (std::isnan(scaled.rate.low) && std::isnan(scaled.rate.high) && asked.limits == PartMethod::normal) {
    answer.notes.push_back(
        {"no_limits", R"(Normal limits have no value without events; "limits":"gamma" has.)"});
  }
  answer.notes.push_back({"reference", "The difference is " + one + " less " + base + "."});
  answer.notes.push_back({"exposure_fixed",
                          "The limits take the exposures, and so the mix, as known; only the counts "
                          "vary. What makes the mix change is not looked at."});
  note_small_count(sides.events, wording, answer.notes);
  note_large_sum(sides.events, answer.notes);
  answer.method = {split_source, limits_source(asked.limits)};
  answer.picture =
      picture_of(wording, parts, names, rate, mix, one + " less " + base + ": rate or mix" + wording.period(),
                 asked.stratum.column, per);
  answer.tables = {
      {"strata", {{"stratum", names}, {"rate_part", std::move(rate)}, {"mix_part", std::move(mix)}}}};
  return answer;
}

}  // namespace

// Not rate_or_mix, which is the engine's function.
extern const Question rate_or_mix_question = question<RateOrMixAsked>(
    {.name = "rate_or_mix",
     .asks = "Two periods or places: is the difference the rate or the mix, and how much?",
     .roles = {shared::count(), shared::exposure(true),
               bind::role("stratum", Holds::levels, &RateOrMixAsked::stratum,
                          "the mix: age band, case type, kind of pipe", true),
               bind::role("group", Holds::levels, &RateOrMixAsked::group, "two values: periods or places",
                          true)},
     .options = {shared::confidence(), shared::per(),
                 bind::level("reference", &RateOrMixAsked::reference,
                             "the group that is taken off the other; by default the second to appear"),
                 bind::choice("limits", &RateOrMixAsked::limits, "how the parts' limits are found",
                              {{"gamma", PartMethod::gamma}, {"normal", PartMethod::normal}}),
                 shared::side(&RateOrMixAsked::side), mask_option()},
     .figures = {{"difference", Style::rate, "crude rate of the group less the reference's, per `per`"},
                 {"rate_part", Style::rate, "what the rates within strata make of it", "rate_low",
                  "rate_high"},
                 {"rate_low", Style::rate, "lower limit of rate_part"},
                 {"rate_high", Style::rate, "upper limit of rate_part"},
                 {"mix_part", Style::rate, "what the shares of the strata make of it", "mix_low", "mix_high"},
                 {"mix_low", Style::rate, "lower limit of mix_part"},
                 {"mix_high", Style::rate, "upper limit of mix_part"}},
     .tables = {{"strata",
                 "one row for each stratum, in order of appearance; they add up to the two parts",
                 {{"stratum", Style::level, ""},
                  {"rate_part", Style::rate, "by the rate, {events} {per}"},
                  {"mix_part", Style::rate, "by the mix, {events} {per}"}}}},
     .sources = {split_source, limits_source(PartMethod::gamma), limits_source(PartMethod::normal)},
     .headline = "difference",
     .answer = answer,
     .examples =
         {R"({"ask":"rate_or_mix","of":{"count":[30,42,18,60],"exposure":[3000,1400,2600,2500],"stratum":["day","night","day","night"],"group":["2023","2023","2024","2024"]},"with":{"per":1000,"reference":"2023"},"words":{"event":"fall","events":"falls","exposure":"bed-days"}})"},
     .light = true});

}  // namespace countsel
