// protocol/questions/how_often.cpp -- how often does it happen, and how sure are we?
#include <cmath>

#include "engine/numbers/sums.hpp"
#include "engine/rates/dispersion.hpp"
#include "engine/rates/rate_batch.hpp"
#include "engine/table/group.hpp"
#include "protocol/declare/question.hpp"
#include "protocol/declare/shared_options.hpp"
#include "protocol/wording/rates.hpp"

namespace countsel {
namespace {

struct HowOften : RateAsked {
  Role label, group;
  RateMethod limits = RateMethod::exact;
  Side side = Side::both;
  GammaPrior prior;
  Spread spread = Spread::poisson;
  StoppedBy stopped_by = StoppedBy::time;
};

void set_prior(HowOften& asked, const Json& given) {
  if (!given.is_object()) bind::wrong_type("prior", R"(an object such as {"shape":0.5,"rate":0})", given);
  for (const auto& [key, value] : given.items()) {
    if (key != "shape" && key != "rate") {
      throw Refusal(Code::unknown_key, "\"" + key + "\" is not known in prior.", {}, "Known: shape, rate.");
    }
    if (!value.is_number()) bind::wrong_type("prior." + key, "a number", value);
    const double number = value.get<double>();
    if (!(number >= 0))
      throw Refusal(Code::bad_value, "prior." + key + " is " + value.dump() + "; it should be 0 or more.");
    (key == "shape" ? asked.prior.shape : asked.prior.rate) = number;
  }
}

/// The records whose rates are asked: groups if there are any, else rows.
struct Records {
  std::vector<std::string> labels;
  std::vector<double> count, exposure;
};

Records records_of(const HowOften& asked) {
  if (asked.group.given) {
    auto totals =
        add_up(asked.count.numbers, asked.exposure.numbers, asked.group.codes, asked.group.levels.size());
    return {asked.group.levels, std::move(totals.count), std::move(totals.exposure)};
  }
  Records records{labels_of(asked.label, asked), {}, {}};
  records.count.assign(asked.count.numbers.begin(), asked.count.numbers.end());
  records.exposure.assign(asked.exposure.numbers.begin(), asked.exposure.numbers.end());
  return records;
}

/// Pearson's dispersion: of rows within groups; without groups, of all rows round the common rate.
Dispersion dispersion_of(const HowOften& asked) {
  const std::vector<std::int32_t> one(asked.group.given ? 0 : asked.rows, 0);
  return pooled_dispersion(asked.count.numbers, asked.exposure.numbers,
                           asked.group.given ? asked.group.codes : std::span<const std::int32_t>(one),
                           asked.group.given ? asked.group.levels.size() : 1);
}

Answer answer(const HowOften& asked, Context& context) {
  const Wording wording(asked.words, asked.frame());
  Answer answer;
  const Records records = records_of(asked);
  const LimitsSpec spec{asked.limits, asked.confidence, asked.side, asked.stopped_by, asked.prior};
  const double count = sum(asked.count.numbers), exposure = sum(asked.exposure.numbers);

  const std::size_t n = records.count.size();
  std::vector<double> rate(n), low(n), high(n), every(n);
  Limits total{};
  const bool scaled = asked.spread == Spread::scaled;
  const Dispersion spread = asked.rows > 1 ? dispersion_of(asked) : Dispersion{NAN, 0, NAN};
  if (scaled) {
    if (!(spread.df > 0)) {
      throw Refusal(Code::too_few, "A scaled spread needs several rows in at least one group with events.",
                    {}, "Give the rows rather than their totals, or leave spread at \"poisson\".");
    }
    const double phi = at_least_one(spread.phi);
    for (std::size_t i = 0; i < n; ++i) {
      const auto one = scaled_rate_limits(records.count[i], records.exposure[i], phi, spread.df,
                                          asked.confidence, asked.side);
      low[i] = one.low;
      high[i] = one.high;
    }
    total = scaled_rate_limits(count, exposure, phi, spread.df, asked.confidence, asked.side);
    answer.method = {{"scaled limits on the log scale, Student's quantile",
                      "McCullagh and Nelder, Generalized Linear Models, 2nd ed. 1989, section 6.2"}};
    answer.notes.push_back(scaled_note(spread, phi));
  } else {
    rate_limits(records.count, records.exposure, spec, low, high, context.work);
    total = rate_limits(count, exposure, spec);
    answer.method = {shared::source_of(asked.limits)};
    note_dispersion(spread, asked.group.given, wording, answer.notes);
  }
  for (std::size_t i = 0; i < n; ++i) {
    rate[i] = records.count[i] / records.exposure[i] * asked.per;
    low[i] *= asked.per;
    high[i] *= asked.per;
    every[i] = records.exposure[i] / records.count[i];
  }
  note_no_limits(records.labels, low, high, asked.limits, scaled, answer.notes);
  note_small_count(count, wording, answer.notes);
  note_large_sum(count, answer.notes);
  if (!asked.exposure.given) answer.notes.push_back(no_exposure_note(asked.rows));

  const double overall = count / exposure * asked.per;
  const double overall_low = total.low * asked.per, overall_high = total.high * asked.per;
  answer.figures = {{"count", count},
                    {"exposure", exposure},
                    {"rate", overall},
                    {"low", overall_low},
                    {"high", overall_high},
                    {"every", exposure / count},
                    {"every_low", 1 / total.high},
                    {"every_high", 1 / total.low}};
  answer.say = say_rate(wording, {count, exposure, overall, overall_low, overall_high},
                        method_words(asked.limits, scaled), asked.side, asked.exposure.given);
  if (n > 1) answer.say += " " + say_extremes(wording, records.labels, rate, low, high);
  if (n > 1 || !std::isnan(overall_low)) {
    Picture picture{.kind = "limits",
                    .title = capital(wording.rate_unit()) + wording.period(),
                    .x_name = asked.group.given   ? asked.group.column
                              : asked.label.given ? asked.label.column
                                                  : "row",
                    .x = records.labels,
                    .y_name = wording.rate_unit(),
                    .series = {{.name = "rate with " + wording.level() + " limits",
                                .role = "points",
                                .y = rate,
                                .low = low,
                                .high = high}}};
    if (n > 1) picture.lines = {{"all together", overall}};
    answer.picture = std::move(picture);
  }
  answer.tables = {{"rates",
                    {{"label", records.labels},
                     {"count", records.count},
                     {"exposure", records.exposure},
                     {"rate", std::move(rate)},
                     {"low", std::move(low)},
                     {"high", std::move(high)},
                     {"every", std::move(every)}}}};
  return answer;
}

}  // namespace

extern const Question how_often = question<HowOften>(
    {.name = "how_often",
     .asks = "How often does it happen, and how sure are we?",
     .roles = {shared::count(), shared::exposure(),
               bind::role("label", Holds::label, &HowOften::label, "a name for each row"),
               bind::role("group", Holds::levels, &HowOften::group, "rows of one group are added up")},
     .options = {shared::confidence(), shared::per(),
                 bind::choice("limits", &HowOften::limits, "how the limits are found",
                              shared::rate_methods()),
                 shared::side(&HowOften::side),
                 bind::custom<HowOften>("prior", "object",
                                        "for bayes: the gamma prior's shape and its rate in exposure units",
                                        set_prior, {{"shape", 0.5}, {"rate", 0}}),
                 shared::spread(&HowOften::spread),
                 bind::choice("stopped_by", &HowOften::stopped_by,
                              "how the record ended: at a planned end, or at the last event",
                              {{"time", StoppedBy::time}, {"event", StoppedBy::event}})},
     .figures = {{"count", Style::count, "events in all"},
                 {"exposure", Style::exposure, "observed in all"},
                 {"rate", Style::rate, "events per `per`", "low", "high"},
                 {"low", Style::rate, "lower limit of the rate"},
                 {"high", Style::rate, "upper limit of the rate"},
                 {"every", Style::every, "exposure for each event", "every_low", "every_high"},
                 {"every_low", Style::every, "lower limit of every"},
                 {"every_high", Style::every, "upper limit of every"}},
     .tables = {{"rates",
                 "one row for each row or group",
                 {{"label", Style::text, ""},
                  {"count", Style::count, ""},
                  {"exposure", Style::exposure, ""},
                  {"rate", Style::rate, "", "low", "high"},
                  {"low", Style::rate, ""},
                  {"high", Style::rate, ""},
                  {"every", Style::every, ""}}}},
     .sources = shared::rate_sources(),
     .headline = "rate",
     .answer = answer,
     .examples =
         {R"({"ask":"how_often","of":{"count":[3,0,5],"exposure":[1200,800,1500],"label":["North","East","South"]},"with":{"per":1000},"words":{"event":"fall","events":"falls","exposure":"bed-days"}})",
          R"({"ask":"how_often","of":{"count":0,"exposure":5000},"with":{"side":"upper"}})"},
     .light = true});

}  // namespace countsel
