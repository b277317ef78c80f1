// protocol/questions/which_higher.cpp -- two groups: by how much, and could it be chance?
#include <cmath>

#include "engine/rates/dispersion.hpp"
#include "engine/table/group.hpp"
#include "protocol/declare/comparison_options.hpp"
#include "protocol/declare/question.hpp"
#include "protocol/declare/shared_options.hpp"
#include "protocol/wording/comparison.hpp"
#include "protocol/wording/numbers.hpp"
#include "protocol/wording/rates.hpp"

namespace countsel {
namespace {

struct WhichHigher : RateAsked {
  Role group;
  std::optional<std::string> reference;
  RatioMethod limits = RatioMethod::exact;
  TestMethod test = TestMethod::exact;
  Side side = Side::both;
  Direction direction = Direction::either;
  Spread spread = Spread::poisson;
  std::vector<double> margin;  ///< one ratio not to be worse than, or two to lie between
};

void set_margin(WhichHigher& asked, const Json& given) {
  const Json list = given.is_array() ? given : Json::array({given});
  for (const auto& value : list) {
    if (!value.is_number()) bind::wrong_type("margin", "a ratio, or two ratios to lie between", value);
    const double ratio = value.get<double>();
    if (!(ratio > 0)) throw Refusal(Code::bad_value, "margin is " + value.dump() + "; a ratio is above 0.");
    asked.margin.push_back(ratio);
  }
  if (asked.margin.empty() || asked.margin.size() > 2 ||
      (asked.margin.size() == 2 && !(asked.margin[0] < asked.margin[1]))) {
    throw Refusal(Code::bad_value,
                  "margin is " + given.dump() + "; it should be a ratio, or two, the smaller first.");
  }
}

Source difference_source(RatioMethod method) {
  if (method == RatioMethod::likelihood)
    return {"likelihood-ratio limits of the difference",
            "Wilks, Annals of Mathematical Statistics 9 (1938) 60-62"};
  if (method == RatioMethod::log_wald)
    return {"Wald limits of the difference", "Wald, Trans. Amer. Math. Soc. 54 (1943) 426-482"};
  return {"score limits of the difference",
          "Ng, Gu and Tang, Computational Statistics and Data Analysis 51 (2007) 3085-3099"};
}

const auto limit_names = shared::ratio_methods();
const auto test_names = shared::test_methods();

/// P-value of "worse than the margin" (or outside the two), small when that can be ruled out.
template <class Test>
double margin_p(const std::vector<double>& margin, Test test) {
  if (margin.size() == 2)
    return std::max(test(Direction::above, margin[0]), test(Direction::below, margin[1]));
  return test(margin[0] < 1 ? Direction::above : Direction::below, margin[0]);
}

Answer answer(const WhichHigher& asked, Context&) {
  const auto [first, reference] =
      shared::two_groups(asked.group, asked.reference, "Add the rows of the other group, or ask how_often.",
                         R"(Keep two with "only", or ask do_they_differ.)");
  const auto totals = add_up(asked.count.numbers, asked.exposure.numbers, asked.group.codes, 2);
  const TwoRates data{totals.count[first], totals.exposure[first], totals.count[reference],
                      totals.exposure[reference]};
  const Dispersion spread =
      pooled_dispersion(asked.count.numbers, asked.exposure.numbers, asked.group.codes, 2);
  const bool scaled = asked.spread == Spread::scaled;
  if (scaled && !(spread.df > 0)) {
    throw Refusal(Code::too_few, "A scaled spread needs several rows in at least one group with events.", {},
                  "Give the rows rather than their totals, or leave spread at \"poisson\".");
  }
  const double phi = at_least_one(spread.phi), confidence = asked.confidence;
  const Limits ratio = scaled ? scaled_ratio_limits(data, phi, spread.df, confidence, asked.side)
                              : ratio_limits(data, asked.limits, confidence, asked.side);
  const Limits difference = scaled ? scaled_difference_limits(data, phi, spread.df, confidence, asked.side)
                                   : difference_limits(data, asked.limits, confidence, asked.side);
  const auto test = [&](Direction direction, double null_ratio) {
    return scaled ? scaled_ratio_test(data, phi, spread.df, direction, null_ratio)
                  : ratio_test(data, asked.test, direction, null_ratio);
  };
  const double rate1 = data.count1 / data.exposure1, rate0 = data.count0 / data.exposure0, per = asked.per;
  const CouldShow could = could_show(data, asked.test, confidence, asked.direction);
  const auto& names = asked.group.levels;
  const Wording wording(asked.words, asked.frame());
  const SaidComparison said{
      .first = names[first],
      .reference = names[reference],
      .data = data,
      .ratio = rate1 / rate0,
      .ratio_low = ratio.low,
      .ratio_high = ratio.high,
      .difference = (rate1 - rate0) * per,
      .difference_low = difference.low * per,
      .difference_high = difference.high * per,
      .difference_p = scaled ? scaled_difference_test(data, phi, spread.df, asked.direction)
                             : difference_test(data, asked.limits, asked.direction),
      .p_value = test(asked.direction, 1),
      .could_show = could.above,
      .could_show_below = could.below,
      .per = per,
      .level = 1 - confidence,
      .side = asked.side,
      .direction = asked.direction,
      .limits = scaled ? "scaled" : shared::name_of(asked.limits, limit_names),
      .test = scaled ? "scaled F test"
                     : shared::name_of(asked.test, test_names) +
                           (asked.test == TestMethod::e_test ? "" : " test"),
  };

  Answer answer{.say = say_comparison(wording, said)};
  answer.figures = {{"ratio", said.ratio},
                    {"ratio_low", said.ratio_low},
                    {"ratio_high", said.ratio_high},
                    {"difference", said.difference},
                    {"difference_low", said.difference_low},
                    {"difference_high", said.difference_high},
                    {"difference_p", said.difference_p},
                    {"p_value", said.p_value},
                    {"dispersion", spread.phi},
                    {"posterior_higher", posterior_higher(data)},
                    {"could_show", could.above},
                    {"could_show_below", could.below}};
  if (!asked.margin.empty()) {
    const double p = margin_p(asked.margin, test);
    answer.figures.emplace_back("margin_p", p);
    const bool holds = p < said.level;
    const std::string what = asked.margin.size() == 2
                                 ? "the ratio lies between " + significant_text(asked.margin[0], 3) +
                                       " and " + significant_text(asked.margin[1], 3)
                                 : "the ratio is " + std::string(asked.margin[0] < 1 ? "above " : "below ") +
                                       significant_text(asked.margin[0], 3);
    answer.say += " That " + what + (holds ? " is shown" : " is not shown") + " (p " +
                  (p < 0.0001 || p > 0.99 ? "" : "= ") + p_text(p) + ").";
  }

  OutTable groups{"groups", {}};
  std::vector<double> count, exposure, rate, low, high;
  for (std::size_t g = 0; g < 2; ++g) {
    count.push_back(totals.count[g]);
    exposure.push_back(totals.exposure[g]);
    rate.push_back(totals.count[g] / totals.exposure[g] * per);
    const Limits own = scaled
                           ? scaled_rate_limits(count[g], exposure[g], phi, spread.df, confidence, asked.side)
                           : rate_limits(count[g], exposure[g],
                                         {.method = shared::rate_method(asked.limits),
                                          .confidence = confidence,
                                          .side = asked.side,
                                          .prior = {}});
    low.push_back(own.low * per);
    high.push_back(own.high * per);
  }
  note_comparison(wording, said, {low[first], high[first]}, {low[reference], high[reference]}, answer.notes);
  if (scaled) answer.notes.push_back(scaled_note(spread, phi));
  if (!scaled) note_dispersion(spread, true, wording, answer.notes);
  note_small_count(data.count1 + data.count0, wording, answer.notes);
  note_large_sum(data.count1 + data.count0, answer.notes);
  if (std::isnan(ratio.low) || std::isnan(ratio.high)) {
    answer.notes.push_back(
        {"no_limits",
         "This method has no limits where a group has no events; \"limits\":\"exact\" or \"mid-p\" has."});
  }
  answer.notes.push_back({"reference", "Rates are compared with " + names[reference] + "."});

  answer.method =
      scaled ? std::vector<
                   Source>{{"scaled limits and F test on the log scale",
                            "McCullagh and Nelder, Generalized Linear Models, 2nd ed. 1989, section 6.2"}}
             : std::vector<Source>{shared::source_of(asked.limits), difference_source(asked.limits),
                                   shared::source_of(asked.test)};
  answer.method.push_back({"posterior probability with Jeffreys' priors",
                           "Jeffreys, Theory of Probability, 3rd ed. 1961, section 3.1"});
  answer.picture = Picture{
      .kind = "limits",
      .title = names[first] + " and " + names[reference] + ": " + wording.rate_unit() + wording.period(),
      .x_name = asked.group.column,
      .x = names,
      .y_name = wording.rate_unit(),
      .series = {{.name = "rate with " + wording.level() + " limits",
                  .role = "points",
                  .y = rate,
                  .low = low,
                  .high = high}}};
  groups.columns = {{"group", names}, {"count", count}, {"exposure", exposure},
                    {"rate", rate},   {"low", low},     {"high", high}};
  answer.tables = {std::move(groups)};
  return answer;
}

}  // namespace

extern const Question which_higher = question<WhichHigher>(
    {.name = "which_higher",
     .asks = "Two groups: by how much do they differ, and could it be chance?",
     .roles = {shared::count(), shared::exposure(true),
               bind::role("group", Holds::levels, &WhichHigher::group,
                          "two values; rows of one group are added up", true)},
     .options = {shared::confidence(), shared::per(),
                 bind::level("reference", &WhichHigher::reference,
                             "the group that the other is compared with; by default the second to appear"),
                 bind::choice("limits", &WhichHigher::limits, "how the limits are found", limit_names),
                 bind::choice("test", &WhichHigher::test, "how the p-value is found", test_names),
                 shared::side(&WhichHigher::side), shared::direction(&WhichHigher::direction),
                 shared::spread(&WhichHigher::spread),
                 bind::custom<WhichHigher>("margin", "ratio or two ratios",
                                           "not worse than this ratio, or within these two", set_margin)},
     .figures = {{"ratio", Style::ratio, "rate of the group over the reference's", "ratio_low", "ratio_high"},
                 {"ratio_low", Style::ratio, "lower limit of the ratio"},
                 {"ratio_high", Style::ratio, "upper limit of the ratio"},
                 {"difference", Style::rate, "rate of the group less the reference's", "difference_low",
                  "difference_high"},
                 {"difference_low", Style::rate, "lower limit of the difference"},
                 {"difference_high", Style::rate, "upper limit of the difference"},
                 {"difference_p", Style::p_value, "p-value of no difference, by the difference's method"},
                 {"p_value", Style::p_value, "p-value of equal rates"},
                 {"dispersion", Style::number, "Pearson's dispersion of rows within groups"},
                 {"posterior_higher", Style::share,
                  "posterior probability that the rate is above the reference's"},
                 {"could_show", Style::ratio, "nearest ratio above 1 that would show 8 times in 10"},
                 {"could_show_below", Style::ratio, "nearest ratio below 1 that would show 8 times in 10"},
                 {"margin_p", Style::p_value, "with a margin: p-value of being beyond it"}},
     .tables = {{"groups",
                 "the two groups, in order of appearance",
                 {{"group", Style::level, ""},
                  {"count", Style::count, ""},
                  {"exposure", Style::exposure, ""},
                  {"rate", Style::rate, "", "low", "high"},
                  {"low", Style::rate, ""},
                  {"high", Style::rate, ""}}}},
     .sources = {shared::source_of(RatioMethod::exact), shared::source_of(RatioMethod::mid_p),
                 shared::source_of(RatioMethod::score), shared::source_of(RatioMethod::likelihood),
                 shared::source_of(RatioMethod::log_wald), difference_source(RatioMethod::score),
                 shared::source_of(TestMethod::exact), shared::source_of(TestMethod::e_test)},
     .headline = "ratio",
     .answer = answer,
     .examples =
         {R"({"ask":"which_higher","of":{"count":[14,5],"exposure":[2300,2100],"group":["North","South"]},"with":{"per":1000},"words":{"event":"fall","events":"falls","exposure":"bed-days"}})"},
     .light = true});

}  // namespace countsel
