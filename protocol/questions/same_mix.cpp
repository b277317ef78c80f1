// protocol/questions/same_mix.cpp -- rates compared as if the mix (age, size, pipe type) were the same.
#include <algorithm>
#include <cmath>

#include "engine/numbers/sums.hpp"
#include "engine/rates/standardise.hpp"
#include "protocol/declare/comparison_options.hpp"
#include "protocol/declare/question.hpp"
#include "protocol/declare/shared_options.hpp"
#include "protocol/questions/mix_limits.hpp"
#include "protocol/wording/mix.hpp"
#include "protocol/wording/numbers.hpp"
#include "protocol/wording/rates.hpp"

namespace countsel {
namespace {

enum class Way { direct, indirect };
struct SameMix : RateAsked {
  Role stratum, group, weight, standard_rate, standard_exposure;
  std::optional<std::string> reference;
  Way way = Way::direct;
  MixLimits limits = MixLimits::unset;
  Side side = Side::both;
};

/// One value for each stratum; refuses rows of one stratum that do not agree.
std::vector<double> by_stratum(const SameMix& asked, const Role& role) {
  std::vector<double> values(asked.stratum.levels.size(), NAN);
  std::vector<std::size_t> from(values.size());
  for (std::size_t i = 0; i < asked.rows; ++i) {
    const auto s = static_cast<std::size_t>(asked.stratum.codes[i]);
    if (std::isnan(values[s])) {
      values[s] = role.numbers[i];
      from[s] = i;
    } else if (values[s] != role.numbers[i]) {
      throw Refusal(Code::bad_value,
                    "Stratum " + asked.stratum.levels[s] + " has the " + role.column + " " +
                        number_text(values[s]) + " in row " + std::to_string(asked.row_number(from[s])) +
                        " and " + number_text(role.numbers[i]) + " in row " +
                        std::to_string(asked.row_number(i)) + ".",
                    {{role.column, asked.row_number(from[s])}, {role.column, asked.row_number(i)}},
                    "Every row of a stratum takes the same one: it belongs to the standard, not to a group.");
    }
  }
  return values;
}

struct Strata {
  std::vector<std::string> groups;
  StrataTable table;
};

Strata strata_of(const SameMix& asked) {
  const std::vector<std::int32_t> one(asked.group.given ? 0 : asked.rows, 0);
  Strata strata{asked.group.given ? asked.group.levels : std::vector<std::string>{"all"}, {}};
  strata.table = tabulate(asked.count.numbers, asked.exposure.numbers,
                          asked.group.given ? asked.group.codes : std::span<const std::int32_t>(one),
                          asked.stratum.codes, strata.groups.size(), asked.stratum.levels.size());
  for (std::size_t g = 0; g < strata.groups.size(); ++g) {
    const auto own = std::span(strata.table.exposures).subspan(strata.table.at(g, 0), strata.table.strata);
    if (sum(own) > 0) continue;
    throw Refusal(Code::bad_exposure, "Group " + strata.groups[g] + " has no exposure in any stratum.",
                  {{asked.exposure.column, 0}}, R"(Leave it out with "only", or give its exposure.)");
  }
  return strata;
}

/// "North in 80+" for each, at most five.
std::string cells_text(const SameMix& asked, const Strata& strata, const std::vector<Cell>& cells) {
  std::vector<std::string> named;
  for (const auto& cell : cells) {
    named.push_back(asked.group.given
                        ? strata.groups[cell.group] + " in " + asked.stratum.levels[cell.stratum]
                        : asked.stratum.levels[cell.stratum]);
  }
  return listed(named, 5);
}

std::size_t reference_of(const SameMix& asked, const Strata& strata) {
  if (asked.reference && !asked.group.given)
    throw Refusal(Code::bad_value, "A reference is named, but there is no group.", {},
                  "Give the role group, or leave the reference out.");
  if (asked.reference) return shared::reference_among(asked.group, *asked.reference);
  std::size_t most = 0;
  double largest = -1;
  for (std::size_t g = 0; g < strata.groups.size(); ++g) {
    const double own =
        sum(std::span(strata.table.exposures).subspan(strata.table.at(g, 0), strata.table.strata));
    if (own > largest) most = g;
    largest = std::max(largest, own);
  }
  return most;
}

std::vector<AdjustedRate> directly(const SameMix& asked, const Strata& strata, std::size_t reference,
                                   Answer& answer) {
  const DirectMethod method = direct_method(asked.limits);
  auto weights = asked.weight.given ? by_stratum(asked, asked.weight) : exposure_weights(strata.table);
  const double total = sum(weights);
  if (!(total > 0))
    throw Refusal(Code::bad_value, "All weights are 0.", {{asked.weight.column, 0}},
                  "Give each stratum its share of the standard.");
  const auto missing = missing_cells(strata.table, weights);
  if (!missing.empty()) {
    throw Refusal(
        Code::bad_exposure,
        "There is no exposure for " + cells_text(asked, strata, missing) +
            ", though the stratum has a weight; the rate there is unknown." +
            (missing.size() > 5 ? " There are " + std::to_string(missing.size()) + " such gaps." : ""),
        {{asked.exposure.column, 0}, {asked.stratum.column, 0}},
        R"(Merge strata, give such a stratum a weight of 0, or leave it out of all groups with "only".)");
  }
  if (!asked.weight.given) {
    answer.notes.push_back(
        {"weights",
         strata.groups.size() > 1
             ? "The weights are the exposures of all groups together, " + given_text(total) +
                   " in all; other data would bring other weights. The role weight sets them."
             : "With one group its own exposures are the weights, so the adjusted rate is the crude "
               "one. The role weight sets a standard."});
  } else if (std::abs(total - 1) > 1e-9) {
    answer.notes.push_back(
        {"weights_scaled", "The weights add up to " + given_text(total) +
                               ", not to 1; they were divided by their sum for the rates."});
  }
  std::vector<std::string> idle;
  for (std::size_t s = 0; s < weights.size(); ++s) {
    if (weights[s] == 0) idle.push_back(asked.stratum.levels[s]);
  }
  if (!idle.empty()) {
    answer.notes.push_back(
        {"no_weight", "The weight of " + listed(idle, 5) +
                          " is 0: what happened there does not enter the adjusted rates."});
  }
  const bool several = strata.groups.size() > 1;
  answer.method = direct_sources(method, several);
  return direct_rates(strata.table, weights,
                      {.method = method,
                       .confidence = asked.confidence,
                       .side = asked.side,
                       .reference = several ? std::optional(reference) : std::nullopt});
}

std::vector<AdjustedRate> indirectly(const SameMix& asked, const Strata& strata, Answer& answer) {
  const RateMethod method = indirect_method(asked.limits);
  if (!asked.standard_rate.given) {
    throw Refusal(Code::missing, "Indirect standardisation needs the role standard_rate.", {},
                  "Give the standard's rate in each stratum, per " + given_text(asked.per) + ".");
  }
  auto rates = by_stratum(asked, asked.standard_rate);
  for (double& rate : rates) rate /= asked.per;
  const auto exposures =
      asked.standard_exposure.given ? by_stratum(asked, asked.standard_exposure) : std::vector<double>{};
  if (!exposures.empty() && !(sum(exposures) > 0))
    throw Refusal(Code::bad_exposure, "The standard has no exposure.", {{asked.standard_exposure.column, 0}},
                  "Give the standard's exposure in each stratum, or leave the role out.");
  std::vector<Cell> missing;
  for (const auto& cell : missing_cells(strata.table, std::vector<double>(rates.size(), 1.0))) {
    missing.push_back(cell);
  }
  if (!missing.empty()) {
    answer.notes.push_back({"absent_strata", "No exposure for " + cells_text(asked, strata, missing) +
                                                 ": nothing is expected there."});
  }
  for (std::size_t g = 0; g < strata.groups.size(); ++g) {
    Sum expected, count;
    for (std::size_t s = 0; s < rates.size(); ++s) {
      expected.add(rates[s] * strata.table.exposures[strata.table.at(g, s)]);
      count.add(strata.table.counts[strata.table.at(g, s)]);
    }
    if (expected.value() == 0 && count.value() > 0) {
      throw Refusal(Code::bad_value,
                    "The standard's rates expect nothing" +
                        (asked.group.given ? " in " + strata.groups[g] : std::string()) +
                        ", yet events happened; their ratio has no value.",
                    {{asked.standard_rate.column, 0}}, "Give the standard's rates with their decimals.");
    }
  }
  if (exposures.empty()) {
    answer.notes.push_back({"no_standard_exposure",
                            "Without the role standard_exposure there is no adjusted rate, only the ratio of "
                            "observed to expected."});
  }
  answer.notes.push_back({"standard_fixed", "The standard's rates are taken as known without error."});
  answer.method = indirect_sources(method);
  return indirect_rates(strata.table, rates, exposures,
                        {.method = method, .confidence = asked.confidence, .side = asked.side, .prior = {}});
}

void note_unused(const SameMix& asked, std::vector<Note>& notes) {
  std::vector<std::string> unused;
  if (asked.way == Way::direct && asked.standard_rate.given) unused.emplace_back("standard_rate");
  if (asked.way == Way::direct && asked.standard_exposure.given) unused.emplace_back("standard_exposure");
  if (asked.way == Way::indirect && asked.weight.given) unused.emplace_back("weight");
  if (unused.empty()) return;
  notes.push_back(
      {"unused_role",
       capital(listed(unused)) + (unused.size() == 1 ? " plays" : " play") +
           (asked.way == Way::direct ? R"( no part in direct standardisation, but with "way":"indirect".)"
                                     : R"( no part in indirect standardisation, but with "way":"direct".)")});
}

Answer answer(const SameMix& asked, Context&) {
  const Wording wording(asked.words, asked.frame());
  Answer answer;
  const Strata strata = strata_of(asked);
  const bool direct = asked.way == Way::direct, several = strata.groups.size() > 1;
  const std::size_t reference = reference_of(asked, strata);
  if (direct && several)
    answer.notes.push_back(
        {"reference", "Adjusted rates are compared with " + strata.groups[reference] +
                          (asked.reference ? "." : ", the group with the most exposure.")});
  const auto rates = direct ? directly(asked, strata, reference, answer) : indirectly(asked, strata, answer);

  std::string limits = asked.limits == MixLimits::unset ? (direct ? "gamma" : "exact")
                                                        : shared::name_of(asked.limits, mix_limit_names());
  if (limits == "dobson" || limits == "byar" || limits == "jeffreys") limits = capital(limits);
  const SaidMix said{.groups = strata.groups,
                     .rates = rates,
                     .reference = reference,
                     .direct = direct,
                     .stratum = asked.stratum.column,
                     .limits = limits,
                     .side = asked.side,
                     .per = asked.per};
  answer.say = say_mix(wording, said);
  note_mix(wording, said, answer.notes);
  note_unused(asked, answer.notes);
  std::vector<double> count, exposure, crude, expected, rate, low, high, ratio, ratio_low, ratio_high;
  bool no_limits = false;
  for (const auto& one : rates) {
    count.push_back(one.count);
    exposure.push_back(one.exposure);
    crude.push_back(one.crude_rate * asked.per);
    expected.push_back(one.expected);
    rate.push_back(one.rate * asked.per);
    low.push_back(one.low * asked.per);
    high.push_back(one.high * asked.per);
    ratio.push_back(one.ratio);
    ratio_low.push_back(one.ratio_low);
    ratio_high.push_back(one.ratio_high);
    no_limits = no_limits || (direct ? std::isnan(one.low) || std::isnan(one.high)
                                     : std::isnan(one.ratio_low) || std::isnan(one.ratio_high));
  }
  if (no_limits) {
    answer.notes.push_back(
        {"no_limits", std::string("These limits have no value without events; ") +
                          (direct ? R"("limits":"gamma" has.)" : R"("limits":"exact" has.)")});
  }
  const double events = sum(count);
  note_large_sum(events, answer.notes);
  answer.headline = direct ? "adjusted_rate" : "ratio";

  Picture picture{
      .kind = "limits",
      .title =
          direct ? capital(wording.rate_unit()) + " at one mix of " + asked.stratum.column + wording.period()
                 : capital(wording.events()) + " over expected" + wording.period(),
      .x_name = asked.group.given ? asked.group.column : "",
      .x = strata.groups,
      .y_name = direct ? wording.rate_unit() : wording.events() + " / expected",
      .series = {{.name = (direct ? "adjusted rate with " : "ratio with ") + wording.level() + " limits",
                  .role = "points",
                  .y = direct ? rate : ratio,
                  .low = direct ? low : ratio_low,
                  .high = direct ? high : ratio_high}}};
  if (direct) {
    picture.series.push_back({.name = "crude rate", .role = "points", .y = crude});
  } else {
    picture.lines = {{"as the standard", 1}};
  }
  answer.picture = std::move(picture);
  OutTable adjusted{"adjusted",
                    {{"group", strata.groups},
                     {"count", std::move(count)},
                     {"exposure", std::move(exposure)},
                     {"crude_rate", std::move(crude)},
                     {"expected", std::move(expected)},
                     {"adjusted_rate", std::move(rate)},
                     {"low", std::move(low)},
                     {"high", std::move(high)},
                     {"ratio", std::move(ratio)},
                     {"ratio_low", std::move(ratio_low)},
                     {"ratio_high", std::move(ratio_high)}}};
  if (!several) {
    for (const auto& [name, cells] : adjusted.columns) {
      if (const auto* numbers = std::get_if<std::vector<double>>(&cells))
        answer.figures.emplace_back(name, numbers->front());
    }
  }
  answer.tables = {std::move(adjusted)};
  return answer;
}

}  // namespace

extern const Question same_mix = question<SameMix>(
    {.name = "same_mix",
     .asks = "How do rates compare as if the mix (age, size, pipe type) were the same?",
     .roles = {shared::count(),
               bind::role("exposure", Holds::exposure_or_0, &RateAsked::exposure, "how much was observed",
                          true),
               bind::role("stratum", Holds::levels, &SameMix::stratum,
                          "the mix: age band, size, kind of pipe", true),
               bind::role("group", Holds::levels, &SameMix::group,
                          "what is compared; without it all is one group"),
               bind::role("weight", Holds::not_below_0, &SameMix::weight,
                          "direct: the standard's share or exposure in each stratum"),
               bind::role("standard_rate", Holds::not_below_0, &SameMix::standard_rate,
                          "indirect: the standard's rate in each stratum, per `per`"),
               bind::role("standard_exposure", Holds::not_below_0, &SameMix::standard_exposure,
                          "indirect: the standard's exposure in each stratum")},
     .options = {shared::confidence(), shared::per(),
                 bind::choice(
                     "way", &SameMix::way,
                     "direct: every group at the weights' mix; indirect: observed over expected at the "
                     "standard's rates",
                     {{"direct", Way::direct}, {"indirect", Way::indirect}}),
                 bind::choice(
                     "limits", &SameMix::limits,
                     "direct: gamma (the default), mid-p, dobson, normal; indirect: exact (the default), "
                     "mid-p and the others",
                     mix_limit_names()),
                 shared::side(&SameMix::side),
                 bind::level("reference", &SameMix::reference,
                             "direct: the group of the ratios; by default the one with most exposure")},
     .figures = {{"count", Style::count, "with one group: its events"},
                 {"exposure", Style::exposure, "with one group: its exposure"},
                 {"crude_rate", Style::rate, "with one group: events per `per` as they stand"},
                 {"expected", Style::number,
                  "events expected: with the weights read as exposures (direct), at the standard's rates "
                  "(indirect)"},
                 {"adjusted_rate", Style::rate, "the rate at the standard's mix", "low", "high"},
                 {"low", Style::rate, "lower limit of the adjusted rate"},
                 {"high", Style::rate, "upper limit of the adjusted rate"},
                 {"ratio", Style::ratio, "to the reference (direct), observed over expected (indirect)",
                  "ratio_low", "ratio_high"},
                 {"ratio_low", Style::ratio, "lower limit of the ratio"},
                 {"ratio_high", Style::ratio, "upper limit of the ratio"}},
     .tables = {{"adjusted",
                 "one row for each group, in order of appearance",
                 {{"group", Style::level, ""},
                  {"count", Style::count, ""},
                  {"exposure", Style::exposure, ""},
                  {"crude_rate", Style::rate, "crude {events} {per}"},
                  {"expected", Style::number, "expected {events}"},
                  {"adjusted_rate", Style::rate, "adjusted {events} {per}", "low", "high"},
                  {"low", Style::rate, ""},
                  {"high", Style::rate, ""},
                  {"ratio", Style::ratio, "", "ratio_low", "ratio_high"},
                  {"ratio_low", Style::ratio, ""},
                  {"ratio_high", Style::ratio, ""}}}},
     .sources = mix_sources(),
     .headline = "adjusted_rate",
     .answer = answer,
     .examples =
         {R"({"ask":"same_mix","of":{"count":[107,141,60,25,150,110],"exposure":[230061,329449,114920,72202,326701,208667],"stratum":["<20","20-24","25-29","<20","20-24","25-29"],"group":["first","first","first","second","second","second"]},"with":{"per":100000},"words":{"events":"cases","exposure":"births"}})",
          R"({"ask":"same_mix","of":{"count":[3,9],"exposure":[520,310],"stratum":["pvc","iron"],"standard_rate":[0.8,2.1],"standard_exposure":[40000,15000]},"with":{"way":"indirect","per":100}})"},
     .light = true});

}  // namespace countsel
