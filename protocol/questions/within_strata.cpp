// protocol/questions/within_strata.cpp -- two groups, compared inside each stratum.
#include <algorithm>
#include <cmath>

#include "engine/numbers/sums.hpp"
#include "engine/rates/standardise.hpp"
#include "engine/rates/strata.hpp"
#include "protocol/declare/comparison_options.hpp"
#include "protocol/declare/question.hpp"
#include "protocol/declare/shared_options.hpp"
#include "protocol/wording/rates.hpp"
#include "protocol/wording/within.hpp"

namespace countsel {
namespace {

struct WithinStrataAsked : RateAsked {
  Role group, stratum;
  std::optional<std::string> reference;
  Measure measure = Measure::ratio;
  StrataMethod limits = StrataMethod::mantel_haenszel;
  Side side = Side::both;
  Direction direction = Direction::either;
  Adjust adjust = Adjust::holm;
};

const std::vector<std::pair<std::string, StrataMethod>> limit_names = {
    {"mantel-haenszel", StrataMethod::mantel_haenszel},
    {"exact", StrataMethod::exact},
    {"mid-p", StrataMethod::mid_p},
    {"likelihood", StrataMethod::likelihood}};

const Source mantel_haenszel_test = {
    "Mantel-Haenszel chi-square for rates, without continuity correction",
    "Mantel and Haenszel, J. National Cancer Institute 22 (1959) 719-748; Rothman and Boice, Epidemiologic "
    "Analysis with a Programmable Calculator, NIH 1979"};
const Source homogeneity_source = {
    "homogeneity by the likelihood ratio",
    "Breslow and Day, Statistical Methods in Cancer Research, vol. II, IARC 1987, section 4.4"};

Source limits_source(StrataMethod method, Measure measure) {
  switch (method) {
    case StrataMethod::mantel_haenszel:
      return {measure == Measure::ratio
                  ? "Mantel-Haenszel rate ratio with the Greenland-Robins variance"
                  : "Mantel-Haenszel rate difference with the Greenland-Robins variance",
              "Greenland and Robins, Biometrics 41 (1985) 55-68"};
    case StrataMethod::exact:
      return {"common ratio by conditional maximum likelihood with exact limits",
              "Martin and Austin, Epidemiology 7 (1996) 29-33"};
    case StrataMethod::mid_p:
      return {"common ratio by conditional maximum likelihood with mid-p limits",
              "Lancaster, J. Amer. Statist. Assoc. 56 (1961) 223-234"};
    default:
      return {"common ratio or difference by maximum likelihood with likelihood-ratio limits",
              "Breslow and Day, Statistical Methods in Cancer Research, vol. II, IARC 1987, section 4.3"};
  }
}

/// How a stratum by itself is compared.
std::string stratum_methods(const WithinStrataAsked& asked) {
  if (asked.measure == Measure::difference)
    return asked.limits == StrataMethod::likelihood ? "likelihood" : "score";
  if (asked.limits == StrataMethod::mantel_haenszel) return "exact";
  return shared::name_of(asked.limits, limit_names);
}

Source stratum_source(const WithinStrataAsked& asked) {
  if (asked.measure == Measure::ratio)
    return shared::source_of(asked.limits == StrataMethod::mid_p        ? RatioMethod::mid_p
                             : asked.limits == StrataMethod::likelihood ? RatioMethod::likelihood
                                                                        : RatioMethod::exact);
  if (asked.limits == StrataMethod::likelihood) return shared::source_of(TestMethod::likelihood);
  return {"score limits of a difference",
          "Ng, Gu and Tang, Computational Statistics and Data Analysis 51 (2007) 3085-3099"};
}

/// What cannot be answered at all: no events, no stratum with both groups.
void require_something(const WithinStrataAsked& asked, const std::vector<TwoRates>& strata, double events) {
  const bool both = std::any_of(strata.begin(), strata.end(),
                                [](const TwoRates& s) { return s.exposure1 > 0 && s.exposure0 > 0; });
  if (!both) {
    throw Refusal(
        Code::too_few, "No stratum has exposure in both groups; there is nothing to compare within.",
        {{asked.stratum.column, 0}}, "Merge strata until some hold both groups, or ask which_higher.");
  }
  if (!(events > 0)) {
    throw Refusal(Code::too_few, "Every count is 0; rates without events cannot be compared.",
                  {{asked.count.column, 0}}, "Ask how_often for how high each rate could still be.");
  }
}

Answer answer(const WithinStrataAsked& asked, Context&) {
  const auto [first, reference] =
      shared::two_groups(asked.group, asked.reference, "Add the rows of the other group, or ask how_often.",
                         R"(Keep two with "only", or ask same_mix, which compares several.)");
  const auto table = tabulate(asked.count.numbers, asked.exposure.numbers, asked.group.codes,
                              asked.stratum.codes, 2, asked.stratum.levels.size());
  const auto& names = asked.stratum.levels;
  const std::size_t n = names.size();
  std::vector<TwoRates> strata;
  for (std::size_t s = 0; s < n; ++s) {
    const std::size_t one = table.at(first, s), base = table.at(reference, s);
    strata.push_back({table.counts[one], table.exposures[one], table.counts[base], table.exposures[base]});
  }
  const double events = sum(table.counts), level = 1 - asked.confidence;
  require_something(asked, strata, events);
  const bool of_ratio = asked.measure == Measure::ratio;
  const WithinStrata result = within_strata(strata, {.measure = asked.measure,
                                                     .method = asked.limits,
                                                     .confidence = asked.confidence,
                                                     .side = asked.side,
                                                     .direction = asked.direction,
                                                     .adjust = asked.adjust});
  const Wording wording(asked.words, asked.frame());
  const SaidWithin said{.first = asked.group.levels[first],
                        .reference = asked.group.levels[reference],
                        .column = asked.stratum.column,
                        .names = names,
                        .result = result,
                        .of_ratio = of_ratio,
                        .limits = asked.limits == StrataMethod::mantel_haenszel
                                      ? "Mantel-Haenszel"
                                      : shared::name_of(asked.limits, limit_names),
                        .side = asked.side,
                        .direction = asked.direction,
                        .per = asked.per,
                        .level = level};
  Answer answer{.say = say_within(wording, said)};
  const double scale = of_ratio ? 1 : asked.per;
  answer.figures = {{of_ratio ? "ratio" : "difference", result.estimate * scale},
                    {"low", result.low * scale},
                    {"high", result.high * scale},
                    {"statistic", result.statistic},
                    {"p_value", result.p_value},
                    {of_ratio ? "crude_ratio" : "crude_difference", result.crude * scale},
                    {"homogeneity_statistic", result.homogeneity.statistic},
                    {"homogeneity_df", result.homogeneity.df},
                    {"homogeneity_p", result.homogeneity.p_value}};
  answer.headline = of_ratio ? "ratio" : "difference";
  note_within(said, answer.notes);
  if (std::isnan(result.low) || std::isnan(result.high)) {
    answer.notes.push_back({"no_limits",
                            "One group has no events in any stratum that holds both, so these limits "
                            R"(have no value; "limits":"exact" has.)"});
  }
  std::vector<std::string> one_sided;
  std::vector<double> count, exposure, reference_count, reference_exposure, estimate, low, high, p_value,
      p_adjusted, weight;
  for (std::size_t s = 0; s < n; ++s) {
    const auto& own = result.strata[s];
    if (!(strata[s].exposure1 > 0 && strata[s].exposure0 > 0)) one_sided.push_back(names[s]);
    count.push_back(strata[s].count1);
    exposure.push_back(strata[s].exposure1);
    reference_count.push_back(strata[s].count0);
    reference_exposure.push_back(strata[s].exposure0);
    estimate.push_back(own.estimate * scale);
    low.push_back(own.low * scale);
    high.push_back(own.high * scale);
    p_value.push_back(own.p_value);
    p_adjusted.push_back(own.p_adjusted);
    weight.push_back(own.weight);
  }
  if (!one_sided.empty()) {
    answer.notes.push_back(
        {"one_sided_strata",
         listed(one_sided, 5) + (one_sided.size() == 1 ? " has" : " have") +
             " exposure in one group only: nothing can be compared there, and what happened "
             "there enters the crude figure alone."});
  }
  answer.notes.push_back(
      {"stratum_limits", "Single strata have " + stratum_methods(asked) + " limits, each at " +
                             wording.level() + "; p_adjusted allows for their number" +
                             (asked.adjust == Adjust::none ? " only where it is asked for." : ".")});
  note_small_count(events, wording, answer.notes);
  note_large_sum(events, answer.notes);
  answer.notes.push_back({"reference", "Rates are compared with " + said.reference + "."});

  answer.method = {limits_source(asked.limits, asked.measure), mantel_haenszel_test, homogeneity_source,
                   stratum_source(asked)};
  if (asked.adjust != Adjust::none) answer.method.push_back(shared::source_of(asked.adjust));
  Picture picture{
      .kind = "limits",
      .title = said.first + " against " + said.reference + " within " + said.column + wording.period(),
      .x_name = said.column,
      .x = names,
      .y_name = of_ratio ? "rate ratio" : "difference, " + wording.rate_unit(),
      .series = {{.name =
                      std::string(of_ratio ? "ratio" : "difference") + " with " + wording.level() + " limits",
                  .role = "points",
                  .y = estimate,
                  .low = low,
                  .high = high}},
      .lines = {{"no difference", of_ratio ? 1.0 : 0.0}}};
  if (std::isfinite(result.estimate)) picture.lines.emplace_back("all strata", result.estimate * scale);
  if (std::isfinite(result.crude)) picture.lines.emplace_back("crude", result.crude * scale);
  answer.picture = std::move(picture);
  answer.tables = {{"strata",
                    {{"stratum", names},
                     {"count", std::move(count)},
                     {"exposure", std::move(exposure)},
                     {"reference_count", std::move(reference_count)},
                     {"reference_exposure", std::move(reference_exposure)},
                     {of_ratio ? "ratio" : "difference", std::move(estimate)},
                     {"low", std::move(low)},
                     {"high", std::move(high)},
                     {"p_value", std::move(p_value)},
                     {"p_adjusted", std::move(p_adjusted)},
                     {"weight", std::move(weight)}}}};
  return answer;
}

std::vector<Source> sources() {
  std::vector<Source> all;
  for (const auto& [name, method] : limit_names) all.push_back(limits_source(method, Measure::ratio));
  all.push_back(limits_source(StrataMethod::mantel_haenszel, Measure::difference));
  all.insert(all.end(), {mantel_haenszel_test, homogeneity_source, shared::source_of(Adjust::holm),
                         shared::source_of(Adjust::bh)});
  return all;
}

}  // namespace

// Not within_strata, which is the engine's function.
extern const Question within_strata_question = question<WithinStrataAsked>(
    {.name = "within_strata",
     .asks = "Two groups, like with like in each stratum: by how much do they differ?",
     .roles = {shared::count(), shared::exposure(true),
               bind::role("group", Holds::levels, &WithinStrataAsked::group, "two values", true),
               bind::role("stratum", Holds::levels, &WithinStrataAsked::stratum,
                          "what the groups are compared within: age band, size, place", true)},
     .options = {shared::confidence(), shared::per(),
                 bind::level("reference", &WithinStrataAsked::reference,
                             "the group that the other is compared with; by default the second to appear"),
                 bind::choice("measure", &WithinStrataAsked::measure, "what is common to the strata",
                              {{"ratio", Measure::ratio}, {"difference", Measure::difference}}),
                 bind::choice("limits", &WithinStrataAsked::limits,
                              "how the common limits are found; exact and mid-p for the ratio alone",
                              limit_names),
                 shared::side(&WithinStrataAsked::side), shared::direction(&WithinStrataAsked::direction),
                 shared::adjust(&WithinStrataAsked::adjust)},
     .figures = {{"ratio", Style::ratio, "common ratio of the group's rate to the reference's", "low",
                  "high"},
                 {"difference", Style::rate, "with that measure: common difference, per `per`", "low",
                  "high"},
                 {"low", Style::ratio, "lower limit"},
                 {"high", Style::ratio, "upper limit"},
                 {"statistic", Style::statistic, "Mantel-Haenszel chi-square"},
                 {"p_value", Style::p_value, "its p-value"},
                 {"crude_ratio", Style::ratio, "the ratio with the strata thrown together"},
                 {"crude_difference", Style::rate,
                  "with that measure: the difference with the strata thrown together"},
                 {"homogeneity_statistic", Style::statistic, "likelihood ratio of a figure for each stratum"},
                 {"homogeneity_df", Style::whole, "its degrees of freedom"},
                 {"homogeneity_p", Style::p_value, "p-value of one figure for all strata"}},
     .tables = {{"strata",
                 "one row for each stratum, in order of appearance",
                 {{"stratum", Style::level, ""},
                  {"count", Style::count, ""},
                  {"exposure", Style::exposure, ""},
                  {"reference_count", Style::count, "reference's {events}"},
                  {"reference_exposure", Style::exposure, "reference's {exposure}"},
                  {"ratio", Style::ratio, "", "low", "high"},
                  {"difference", Style::rate, "difference, {events} {per}", "low", "high"},
                  {"low", Style::ratio, ""},
                  {"high", Style::ratio, ""},
                  {"p_value", Style::p_value, ""},
                  {"p_adjusted", Style::p_value, "adjusted p-value"},
                  {"weight", Style::share, "share of the weight"}}}},
     .sources = sources(),
     .headline = "ratio",
     .answer = answer,
     .examples = {
         R"({"ask":"within_strata","of":{"count":[32,104,206,186,102,2,12,28,28,31],"exposure":[52407,43248,28612,12663,5317,18790,10673,5710,2585,1462],"group":["smokers","smokers","smokers","smokers","smokers","others","others","others","others","others"],"stratum":["35-44","45-54","55-64","65-74","75-84","35-44","45-54","55-64","65-74","75-84"]},"with":{"per":1000},"words":{"event":"death","events":"deaths","exposure":"person-years"}})"}});

}  // namespace countsel
