// protocol/questions/does_it_climb.cpp -- a rate over ordered steps: does it climb or fall?
#include <cmath>

#include "engine/numbers/sums.hpp"
#include "engine/rates/dispersion.hpp"
#include "engine/rates/rate_batch.hpp"
#include "engine/rates/trend.hpp"
#include "protocol/declare/question.hpp"
#include "protocol/declare/shared_options.hpp"
#include "protocol/questions/steps.hpp"
#include "protocol/wording/climb.hpp"
#include "protocol/wording/rates.hpp"

namespace countsel {
namespace {

struct DoesItClimb : RateAsked {
  Role order;
  TrendMethod limits = TrendMethod::likelihood;
  Side side = Side::both;
  Direction direction = Direction::either;
};

const std::vector<std::pair<std::string, TrendMethod>> limit_names = {
    {"likelihood", TrendMethod::likelihood}, {"wald", TrendMethod::wald}, {"score", TrendMethod::score}};

Answer answer(const DoesItClimb& asked, Context& context) {
  Answer answer;
  const Steps steps = steps_of(asked, asked.order, answer.notes);
  const double count = sum(steps.count);
  if (!(count > 0)) {
    throw Refusal(Code::too_few, "Every count is 0; a rate without events neither climbs nor falls.",
                  {{asked.count.column, 0}}, "Ask how_often for how high the rate could still be.");
  }
  const Trend trend = climb(steps.count, steps.exposure, steps.score,
                            {.method = asked.limits,
                             .confidence = asked.confidence,
                             .side = asked.side,
                             .direction = asked.direction});
  const std::size_t n = steps.names.size();
  std::vector<double> rate(n), low(n), high(n), fitted = trend.fitted;
  rate_limits(steps.count, steps.exposure, {.confidence = asked.confidence, .side = asked.side, .prior = {}},
              low, high, context.work);
  for (std::size_t i = 0; i < n; ++i) {
    rate[i] = steps.count[i] / steps.exposure[i] * asked.per;
    low[i] *= asked.per;
    high[i] *= asked.per;
    fitted[i] *= asked.per;
  }
  const double ratio = std::exp(trend.log_ratio);
  const double ratio_low = std::exp(trend.low), ratio_high = std::exp(trend.high);
  const Wording wording(asked.words, asked.frame());
  answer.figures = {{"log_ratio", trend.log_ratio},
                    {"ratio", ratio},
                    {"low", ratio_low},
                    {"high", ratio_high},
                    {"change_percent", 100 * std::expm1(trend.log_ratio)},
                    {"statistic", trend.statistic},
                    {"p_value", trend.p_value},
                    {"departure_statistic", trend.departure_statistic},
                    {"departure_df", trend.departure_df},
                    {"departure_p", trend.departure_p}};
  const SaidClimb said{.ratio = ratio,
                       .low = ratio_low,
                       .high = ratio_high,
                       .p_value = trend.p_value,
                       .departure_p = trend.departure_p,
                       .level = 1 - asked.confidence,
                       .step = steps.numeric ? "unit of " + asked.order.column : "step",
                       .first = steps.names.front(),
                       .last = steps.names.back(),
                       .steps = n,
                       .count = count,
                       .direction = asked.direction,
                       .side = asked.side};
  answer.say = say_climb(wording, said);
  note_climb(said, answer.notes);
  note_dispersion(pooled_dispersion(asked.count.numbers, asked.exposure.numbers, steps.codes, n), true,
                  wording, answer.notes, R"(what_drives with "family":"quasi-poisson" allows for it.)");
  note_small_count(count, wording, answer.notes);
  note_large_sum(count, answer.notes);
  if (!asked.exposure.given) {
    answer.say += " No exposure was given, so each row counts as 1.";
    answer.notes.push_back(no_exposure_note(asked.rows));
  }
  answer.method = {{"score test for trend",
                    "Armitage, Biometrics 11 (1955) 375-386; Breslow and Day, Statistical Methods in Cancer "
                    "Research, vol. II, IARC 1987, section 3.6"},
                   {"log-linear slope, maximum likelihood",
                    "McCullagh and Nelder, Generalized Linear Models, 2nd ed. 1989, chapter 6"},
                   {"likelihood-ratio test of departure from a straight climb",
                    "Wilks, Annals of Mathematical Statistics 9 (1938) 60-62"},
                   shared::source_of(RateMethod::exact)};
  Picture picture{.kind = "fit",
                  .title = capital(wording.rate_unit()) + " by " + asked.order.column + wording.period(),
                  .x_name = asked.order.column,
                  .x = steps.names,
                  .y_name = wording.rate_unit(),
                  .series = {{.name = "rate with " + wording.level() + " limits",
                              .role = "points",
                              .y = rate,
                              .low = low,
                              .high = high},
                             {.name = "straight climb", .role = "line", .y = fitted}}};
  if (steps.numeric) picture.x = steps.score;
  answer.picture = std::move(picture);
  answer.tables = {{"steps",
                    {{"order", steps.names},
                     {"count", steps.count},
                     {"exposure", steps.exposure},
                     {"rate", std::move(rate)},
                     {"low", std::move(low)},
                     {"high", std::move(high)},
                     {"fitted", std::move(fitted)}}}};
  if (steps.numeric) answer.tables.front().columns.front().second = steps.score;
  return answer;
}

}  // namespace

extern const Question does_it_climb = question<DoesItClimb>(
    {.name = "does_it_climb",
     .asks = "Does a rate climb or fall over ordered steps?",
     .roles = {shared::count(), shared::exposure(),
               bind::role(
                   "order", Holds::order, &DoesItClimb::order,
                   "the steps: numbers as they are spaced, or texts as equal steps in order of appearance",
                   true)},
     .options = {shared::confidence(), shared::per(),
                 bind::choice("limits", &DoesItClimb::limits, "how the slope's limits are found",
                              limit_names),
                 shared::side(&DoesItClimb::side), shared::direction(&DoesItClimb::direction)},
     .figures = {{"log_ratio", Style::log, "slope of the log rate for one unit of order"},
                 {"ratio", Style::ratio, "factor for one unit of order", "low", "high"},
                 {"low", Style::ratio, "lower limit of the ratio"},
                 {"high", Style::ratio, "upper limit of the ratio"},
                 {"change_percent", Style::number, "change in percent for one unit of order"},
                 {"statistic", Style::statistic, "score statistic for trend, 1 degree of freedom"},
                 {"p_value", Style::p_value, "p-value of no trend"},
                 {"departure_statistic", Style::statistic, "what a straight climb leaves unexplained"},
                 {"departure_df", Style::whole, "its degrees of freedom"},
                 {"departure_p", Style::p_value, "p-value of a straight climb"}},
     .tables = {{"steps",
                 "one row for each step, in order",
                 {{"order", Style::level, ""},
                  {"count", Style::count, ""},
                  {"exposure", Style::exposure, ""},
                  {"rate", Style::rate, "", "low", "high"},
                  {"low", Style::rate, ""},
                  {"high", Style::rate, ""},
                  {"fitted", Style::rate, "{events} {per}, straight climb"}}}},
     .sources = {{"score test for trend", "Armitage, Biometrics 11 (1955) 375-386"},
                 {"log-linear slope, maximum likelihood",
                  "McCullagh and Nelder, Generalized Linear Models, 2nd ed. 1989, chapter 6"}},
     .headline = "ratio",
     .answer = answer,
     .examples =
         {R"({"ask":"does_it_climb","of":{"count":[8,11,9,16,21],"exposure":[110,112,115,113,116],"order":[2020,2021,2022,2023,2024]},"with":{"per":100},"words":{"event":"burst","events":"bursts","exposure":"km-years"}})"},
     .light = true});

}  // namespace countsel
