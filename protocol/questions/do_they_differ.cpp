// protocol/questions/do_they_differ.cpp -- several groups: do their rates differ beyond chance?
#include <algorithm>
#include <cmath>

#include "engine/numbers/sums.hpp"
#include "engine/rates/dispersion.hpp"
#include "engine/rates/many_rates.hpp"
#include "engine/rates/rate_batch.hpp"
#include "engine/table/group.hpp"
#include "protocol/declare/comparison_options.hpp"
#include "protocol/declare/question.hpp"
#include "protocol/declare/shared_options.hpp"
#include "protocol/wording/many.hpp"
#include "protocol/wording/rates.hpp"

namespace countsel {
namespace {

constexpr std::size_t paired_unasked = 100;  // groups up to which all pairs are compared by default
constexpr double most_pairs = 1e6;

enum class DifferTest { likelihood, pearson, simulated };
enum class Pairs { unset, all, none, reference };

struct DoTheyDiffer : RateAsked {
  Role group;
  DifferTest test = DifferTest::likelihood;
  RatioMethod limits = RatioMethod::exact;
  Side side = Side::both;
  Adjust adjust = Adjust::holm;
  Pairs pairs = Pairs::unset;
  std::optional<std::string> reference;
  double draws = 9999, seed = static_cast<double>(default_seed);
};

Source test_source(DifferTest test) {
  if (test == DifferTest::likelihood)
    return {"likelihood-ratio test of equal rates",
            "Wilks, Annals of Mathematical Statistics 9 (1938) 60-62"};
  if (test == DifferTest::pearson)
    return {"Pearson's chi-square test of equal rates", "Pearson, Philosophical Magazine 50 (1900) 157-175"};
  return {
      "conditional test of equal rates, given the sum of the counts: exact where all outcomes can be looked "
      "at, else (1 + as extreme) / (1 + draws) of random multinomial draws",
      "Davison and Hinkley, Bootstrap Methods and their Application, 1997, section 4.2"};
}

/// The test of a pair that goes with the limits of its ratio.
TestMethod pair_test(RatioMethod limits) {
  switch (limits) {
    case RatioMethod::mid_p:
      return TestMethod::mid_p;
    case RatioMethod::score:
      return TestMethod::score;
    case RatioMethod::likelihood:
      return TestMethod::likelihood;
    default:
      return TestMethod::exact;
  }
}

Answer answer(const DoTheyDiffer& asked, Context& context) {
  const auto& names = asked.group.levels;
  const std::size_t n = names.size();
  if (n < 2) {
    throw Refusal(Code::too_few, "There is only one group, " + names.front() + "; several are compared.",
                  {{asked.group.column, 0}}, "Add the rows of other groups, or ask how_often.");
  }
  const auto totals = add_up(asked.count.numbers, asked.exposure.numbers, asked.group.codes, n);
  const double count = sum(totals.count), exposure = sum(totals.exposure);
  if (!(count > 0)) {
    throw Refusal(Code::too_few, "Every count is 0; rates without events cannot be told apart.",
                  {{asked.count.column, 0}}, "Ask how_often for how high each rate could still be.");
  }
  const bool named = asked.reference.has_value();
  const auto most = std::max_element(totals.exposure.begin(), totals.exposure.end());
  const std::size_t reference = named ? shared::reference_among(asked.group, *asked.reference)
                                      : static_cast<std::size_t>(most - totals.exposure.begin());
  const Pairs pairs = asked.pairs != Pairs::unset ? asked.pairs
                      : named                     ? Pairs::reference
                      : n <= paired_unasked       ? Pairs::all
                                                  : Pairs::none;
  const auto size = static_cast<double>(n);
  if (pairs == Pairs::all && size * (size - 1) / 2 > most_pairs) {
    throw Refusal(Code::too_large, "There are more than a million pairs of " + std::to_string(n) + " groups.",
                  {{asked.group.column, 0}},
                  R"(Compare with one group, "pairs":"reference", or ask who_stands_out.)");
  }
  const Wording wording(asked.words, asked.frame());
  Answer answer;

  const ManyRatesTest test =
      asked.test == DifferTest::simulated
          ? conditional_rates_test(totals.count, totals.exposure,
                                   {.distance = Distance::likelihood,
                                    .draws = static_cast<std::uint64_t>(asked.draws),
                                    .seed = static_cast<std::uint64_t>(asked.seed)},
                                   context.work)
          : many_rates_test(totals.count, totals.exposure,
                            asked.test == DifferTest::pearson ? Distance::pearson : Distance::likelihood);
  answer.method = {test_source(asked.test)};
  if (test.by == ChanceBy::simulation)
    answer.method.back().name += " (seed " + std::to_string(static_cast<std::uint64_t>(asked.seed)) + ")";
  answer.figures = {{"statistic", test.statistic}, {"df", test.df}, {"p_value", test.p_value}};
  if (test.by == ChanceBy::simulation) answer.figures.emplace_back("p_error", test.p_error);

  const LimitsSpec spec{.method = shared::rate_method(asked.limits),
                        .confidence = asked.confidence,
                        .side = asked.side,
                        .prior = {}};
  std::vector<double> rate(n), low(n), high(n);
  rate_limits(totals.count, totals.exposure, spec, low, high, context.work);
  for (std::size_t g = 0; g < n; ++g) {
    rate[g] = totals.count[g] / totals.exposure[g] * asked.per;
    low[g] *= asked.per;
    high[g] *= asked.per;
  }
  const double level = 1 - asked.confidence;
  answer.say =
      say_differ(wording, n, count, exposure, test,
                 asked.test == DifferTest::pearson ? "Pearson's test" : "likelihood-ratio test", level) +
      " " + say_extremes(wording, names, rate, low, high);

  OutTable paired{"pairs", {}};
  std::vector<RatePair> compared;
  const PairSpec pair_spec{.limits = asked.limits,
                           .test = pair_test(asked.limits),
                           .confidence = asked.confidence,
                           .side = asked.side,
                           .adjust = asked.adjust};
  if (pairs == Pairs::all) compared = all_pairs(totals.count, totals.exposure, pair_spec, context.work);
  if (pairs == Pairs::reference) {
    compared = pairs_against(totals.count, totals.exposure, reference, pair_spec, context.work);
    answer.notes.push_back({"reference", "Each group is compared with " + names[reference] +
                                             (named ? "." : ", the one with the most exposure.")});
  }
  std::vector<std::string> first, second;
  std::vector<double> ratio, ratio_low, ratio_high, p_value, p_adjusted;
  for (const auto& pair : compared) {
    first.push_back(names[pair.first]);
    second.push_back(names[pair.second]);
    ratio.push_back(pair.ratio);
    ratio_low.push_back(pair.low);
    ratio_high.push_back(pair.high);
    p_value.push_back(pair.p_value);
    p_adjusted.push_back(pair.p_adjusted);
  }
  if (!compared.empty()) {
    const std::string said = say_pairs(names, compared, level, asked.adjust);
    if (!said.empty()) answer.say += " " + said;
    answer.method.push_back(shared::source_of(asked.limits));
    answer.method.push_back(shared::source_of(pair_spec.test));
    if (asked.adjust != Adjust::none) answer.method.push_back(shared::source_of(asked.adjust));
    if (compared.size() > 1)
      answer.notes.push_back(
          {"pairs_adjusted", "The pairs' limits are each at " + wording.level() +
                                 " and not adjusted for their number; p_adjusted " +
                                 (asked.adjust == Adjust::none ? "is not adjusted either." : "is.")});
  } else if (asked.pairs == Pairs::unset) {
    answer.notes.push_back({"no_pairs", "Pairs were left out, with " + std::to_string(n) +
                                            R"( groups; ask for them with "pairs":"all" or "reference".)"});
  }
  note_differ(wording, totals.count, totals.exposure, test, asked.draws, level, answer.notes);
  note_dispersion(pooled_dispersion(asked.count.numbers, asked.exposure.numbers, asked.group.codes, n), true,
                  wording, answer.notes, R"(what_drives with "family":"quasi-poisson" allows for it.)");
  note_no_limits(names, low, high, spec.method, false, answer.notes);
  note_small_count(count, wording, answer.notes);
  note_large_sum(count, answer.notes);
  if (!asked.exposure.given) answer.notes.push_back(no_exposure_note(asked.rows));
  if (!asked.exposure.given) answer.say += " No exposure was given, so each row counts as 1.";
  answer.method.push_back(shared::source_of(spec.method));

  answer.picture = Picture{.kind = "limits",
                           .title = capital(wording.rate_unit()) + wording.period(),
                           .x_name = asked.group.column,
                           .x = names,
                           .y_name = wording.rate_unit(),
                           .series = {{.name = "rate with " + wording.level() + " limits",
                                       .role = "points",
                                       .y = rate,
                                       .low = low,
                                       .high = high}},
                           .lines = {{"all together", count / exposure * asked.per}}};
  answer.tables = {{"groups",
                    {{"group", names},
                     {"count", totals.count},
                     {"exposure", totals.exposure},
                     {"rate", std::move(rate)},
                     {"low", std::move(low)},
                     {"high", std::move(high)}}}};
  if (pairs != Pairs::none) {
    paired.columns = {{"first", std::move(first)},          {"second", std::move(second)},
                      {"ratio", std::move(ratio)},          {"low", std::move(ratio_low)},
                      {"high", std::move(ratio_high)},      {"p_value", std::move(p_value)},
                      {"p_adjusted", std::move(p_adjusted)}};
    answer.tables.push_back(std::move(paired));
  }
  return answer;
}

std::vector<Source> sources() {
  std::vector<Source> all = {test_source(DifferTest::likelihood), test_source(DifferTest::pearson),
                             test_source(DifferTest::simulated)};
  for (const auto& [name, method] : shared::ratio_methods()) all.push_back(shared::source_of(method));
  all.push_back(shared::source_of(Adjust::holm));
  all.push_back(shared::source_of(Adjust::bh));
  return all;
}

}  // namespace

extern const Question do_they_differ = question<DoTheyDiffer>(
    {.name = "do_they_differ",
     .asks = "Do the rates of several groups differ beyond chance?",
     .roles = {shared::count(), shared::exposure(),
               bind::role("group", Holds::levels, &DoTheyDiffer::group,
                          "two or more values; rows of one group are added up", true)},
     .options = {shared::confidence(), shared::per(),
                 bind::choice("test", &DoTheyDiffer::test, "how the p-value is found",
                              {{"likelihood", DifferTest::likelihood},
                               {"pearson", DifferTest::pearson},
                               {"simulated", DifferTest::simulated}}),
                 shared::adjust(&DoTheyDiffer::adjust),
                 bind::choice("limits", &DoTheyDiffer::limits, "how limits of rates and ratios are found",
                              shared::ratio_methods()),
                 shared::side(&DoTheyDiffer::side),
                 bind::choice(
                     "pairs", &DoTheyDiffer::pairs,
                     "which pairs are compared; by default all of up to 100 groups, or each with the "
                     "reference where one is named",
                     {{"all", Pairs::all}, {"none", Pairs::none}, {"reference", Pairs::reference}}),
                 bind::level("reference", &DoTheyDiffer::reference,
                             "the group that each is compared with; by default the one with most exposure"),
                 shared::draws(&DoTheyDiffer::draws), shared::seed(&DoTheyDiffer::seed)},
     .figures = {{"statistic", Style::statistic, "distance from equal rates"},
                 {"df", Style::whole, "degrees of freedom"},
                 {"p_value", Style::p_value, "p-value of equal rates"},
                 {"p_error", Style::number, "standard error of a simulated p-value"}},
     .tables = {{"groups",
                 "one row for each group, in order of appearance",
                 {{"group", Style::level, ""},
                  {"count", Style::count, ""},
                  {"exposure", Style::exposure, ""},
                  {"rate", Style::rate, "", "low", "high"},
                  {"low", Style::rate, ""},
                  {"high", Style::rate, ""}}},
                {"pairs",
                 "the first group's rate over the second's",
                 {{"first", Style::level, ""},
                  {"second", Style::level, "compared with"},
                  {"ratio", Style::ratio, "", "low", "high"},
                  {"low", Style::ratio, ""},
                  {"high", Style::ratio, ""},
                  {"p_value", Style::p_value, ""},
                  {"p_adjusted", Style::p_value, "adjusted p-value"}}}},
     .sources = sources(),
     .headline = "p_value",
     .answer = answer,
     .examples = {
         R"({"ask":"do_they_differ","of":{"count":[14,5,9,30],"exposure":[2300,2100,1900,2500],"group":["North","South","East","West"]},"with":{"per":1000},"words":{"event":"fall","events":"falls","exposure":"bed-days"}})",
         R"({"ask":"do_they_differ","of":{"count":[3,0,1],"exposure":[40,35,50],"group":["a","b","c"]},"with":{"test":"simulated","pairs":"none"}})"}});

}  // namespace countsel
