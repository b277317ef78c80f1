// protocol/questions/how_likely.cpp -- chances for a count still to come.
#include <cmath>

#include "engine/numbers/sums.hpp"
#include "engine/rates/chance.hpp"
#include "protocol/declare/question.hpp"
#include "protocol/declare/shared_options.hpp"
#include "protocol/wording/chances.hpp"
#include "protocol/wording/numbers.hpp"
#include "protocol/wording/rates.hpp"

namespace countsel {
namespace {

constexpr double nan = std::numeric_limits<double>::quiet_NaN();
constexpr double infinity = std::numeric_limits<double>::infinity();

struct HowLikely : RateAsked {
  Role expected;
  std::optional<double> next_exposure, at_least, at_most, exactly;
  std::vector<double> between;
  double overdispersion = 0;
};

void set_between(HowLikely& asked, const Json& given) {
  if (!given.is_array() || given.size() != 2 || !given[0].is_number() || !given[1].is_number())
    bind::wrong_type("between", "a list of two counts, such as [2, 5]", given);
  const double low = given[0].get<double>(), high = given[1].get<double>();
  if (!(low >= 0 && low <= high && low == std::trunc(low) && high == std::trunc(high))) {
    throw Refusal(Code::bad_value, "between is " + given.dump() +
                                       "; it should be two whole numbers from 0, the smaller first.");
  }
  asked.between = {low, high};
}

AskedRange range_of(const HowLikely& asked) {
  std::vector<AskedRange> ranges;
  std::string names;
  const auto add = [&](bool given, const char* name, double low, double high) {
    if (!given) return;
    ranges.push_back({low, high, true});
    names += (names.empty() ? "" : " and ") + std::string(name);
  };
  add(asked.at_least.has_value(), "at_least", asked.at_least.value_or(0), infinity);
  add(asked.at_most.has_value(), "at_most", 0, asked.at_most.value_or(0));
  add(asked.exactly.has_value(), "exactly", asked.exactly.value_or(0), asked.exactly.value_or(0));
  add(!asked.between.empty(), "between", asked.between.empty() ? 0 : asked.between[0],
      asked.between.empty() ? 0 : asked.between[1]);
  if (ranges.size() > 1) {
    throw Refusal(Code::bad_value, "Both " + names + " are given; one range is asked for at a time.", {},
                  R"(A range with two ends is "between":[2,5].)");
  }
  return ranges.empty() ? AskedRange{0, infinity, false} : ranges.front();
}

double chance_of(const CountToCome& to_come, const HowLikely& asked, const AskedRange& range) {
  if (!range.given) return nan;
  if (asked.at_least) return chance_at_least(to_come, range.low);
  if (asked.at_most) return chance_at_most(to_come, range.high);
  if (asked.exactly) return chance_exactly(to_come, range.low);
  return chance_between(to_come, range.low, range.high);
}

void check_source(const HowLikely& asked) {
  if (asked.expected.given && (asked.count.given || asked.exposure.given)) {
    throw Refusal(Code::bad_value, "An expected number is given as well as a past count; which one holds?",
                  {{asked.expected.column, 0}}, "Give of.expected, or count and exposure.");
  }
  if (asked.expected.given && asked.next_exposure) {
    throw Refusal(Code::bad_value, "next_exposure goes with a past count and exposure, not with expected.",
                  {}, "Leave it out, or give count and exposure in place of expected.");
  }
  if (!asked.expected.given && !asked.next_exposure) {
    throw Refusal(Code::missing,
                  "how_likely needs with.next_exposure: over how much exposure is the count to come?", {},
                  R"(For example "with":{"next_exposure":1200,"at_least":5}.)");
  }
}

Answer answer(const HowLikely& asked, Context&) {
  check_source(asked);
  const AskedRange range = range_of(asked);
  const Wording wording(asked.words, {1, asked.confidence, asked.exposure.given || asked.expected.given});
  const bool past = asked.count.given;
  const double count = past ? sum(asked.count.numbers) : nan;
  const double exposure = past ? sum(asked.exposure.numbers) : nan;
  const CountToCome to_come =
      past ? count_to_come_after(count, exposure, *asked.next_exposure, asked.overdispersion)
           : count_to_come(sum(asked.expected.numbers), asked.overdispersion);
  const LikelyRange likely = likely_range(to_come, asked.confidence);
  const double chance = chance_of(to_come, asked, range);

  Answer answer{.say = say_chance(wording, {.range = range,
                                            .mean = to_come.mean,
                                            .chance = chance,
                                            .low = likely.low,
                                            .high = likely.high,
                                            .past_count = count,
                                            .past_exposure = exposure,
                                            .next_exposure = asked.next_exposure.value_or(nan),
                                            .overdispersion = asked.overdispersion})};
  answer.figures = {{"mean", to_come.mean},
                    {"sd", to_come.sd},
                    {"chance", chance},
                    {"likely_low", likely.low},
                    {"likely_high", likely.high}};
  if (!range.given) answer.headline = "mean";

  if (asked.rows > 1) {
    answer.notes.push_back({"added_up", "The " + std::to_string(asked.rows) + " rows were added up" +
                                            (past ? " to one past." : " to one expected number.")});
  }
  if (past && count < 10) {
    answer.notes.push_back({"small_count", "The past has " + std::string(count > 0 ? "only " : "") +
                                               wording.counted(count) +
                                               "; most of the range's width is doubt about the rate."});
  }
  if (asked.overdispersion == 0) {
    answer.notes.push_back(
        {"steady_rate",
         "It is taken that " + wording.events() +
             " come one by one at a steady rate. Where they cluster or rates wander, the range "
             R"(is wider: "overdispersion" allows for it.)"});
  }
  if (!range.given)
    answer.notes.push_back({"no_range",
                            "No range was asked about; \"at_least\", \"at_most\", \"exactly\" or "
                            "\"between\" gives its chance."});

  // The values asked about are listed too, unless they lie so far out that all others would vanish.
  const double near = to_come.mean + 12 * to_come.sd + 50;
  const bool list_low = range.given && range.low <= near;
  const bool list_high = range.given && range.high <= near;
  const CountChances list = list_chances(to_come, list_low ? range.low : nan, list_high ? range.high : nan);
  if (list.step > 1)
    answer.notes.push_back({"values_thinned", "Of the values that may come, one in " + given_text(list.step) +
                                                  " is listed; each line is the chance of that very value."});
  answer.picture = Picture{.kind = "bars",
                           .title = "Chances of the count to come" + wording.period(),
                           .x_name = wording.events(),
                           .x = list.value,
                           .y_name = "chance",
                           .series = {{.name = "chance", .role = "bars", .y = list.chance}}};
  answer.method = {
      past ? Source{"predictive distribution with Jeffreys' prior: negative binomial",
                    "Bernardo and Smith, Bayesian Theory, 1994, appendix A.2; Jeffreys, Theory of "
                    "Probability, 3rd ed. 1961, section 3.1"}
      : asked.overdispersion > 0
          ? Source{"negative-binomial chances, variance = mean + overdispersion x mean^2",
                   "Johnson, Kemp and Kotz, Univariate Discrete Distributions, 3rd ed. 2005, chapter 5"}
          : Source{"Poisson chances",
                   "Johnson, Kemp and Kotz, Univariate Discrete Distributions, 3rd ed. 2005, chapter 4"}};
  if (past && asked.overdispersion > 0)
    answer.method.push_back(
        {"overdispersion mixed in: variance = mean + overdispersion x mean^2, past and to come",
         "Johnson, Kemp and Kotz, Univariate Discrete Distributions, 3rd ed. 2005, chapter 5"});
  answer.tables = {{"counts", {{"value", list.value}, {"chance", list.chance}, {"at_most", list.at_most}}}};
  return answer;
}

OptionSpec whole(std::string name, std::optional<double> HowLikely::*member, std::string doc) {
  auto spec = bind::number(std::move(name), member, std::move(doc)).from(0).to(9007199254740992.0);
  spec.type = "whole";
  return spec;
}

}  // namespace

extern const Question how_likely = question<HowLikely>(
    {.name = "how_likely",
     .asks = "What are the chances for a count still to come?",
     .roles = {bind::role("expected", Holds::not_below_0, &HowLikely::expected,
                          "the number expected, taken as known"),
               bind::role("count", Holds::count, &RateAsked::count, "events of the past"),
               bind::role("exposure", Holds::exposure, &RateAsked::exposure,
                          "how much was observed in that past")},
     .options = {shared::confidence(),
                 bind::number("next_exposure", &HowLikely::next_exposure,
                              "with a past: the exposure of the count to come", "exposure")
                     .over(0),
                 whole("at_least", &HowLikely::at_least, "the chance of so many or more"),
                 whole("at_most", &HowLikely::at_most, "the chance of so many or fewer"),
                 whole("exactly", &HowLikely::exactly, "the chance of just so many"),
                 bind::custom<HowLikely>("between", "list of two counts",
                                         "the chance of a count from the first to the second, both included",
                                         set_between),
                 bind::number("overdispersion", &HowLikely::overdispersion,
                              "variance = mean + overdispersion x mean^2")
                     .from(0)},
     .figures = {{"mean", Style::number, "mean of the count to come"},
                 {"sd", Style::number, "its standard deviation"},
                 {"chance", Style::share, "the chance asked for"},
                 {"likely_low", Style::whole, "lower end of the range that holds it at this confidence"},
                 {"likely_high", Style::whole, "upper end of that range"}},
     .tables = {{"counts",
                 "the chance of each count",
                 {{"value", Style::whole, "{events}"},
                  {"chance", Style::number, "chance"},
                  {"at_most", Style::number, "chance of so many or fewer"}}}},
     .sources =
         {{"Poisson and negative-binomial chances",
           "Johnson, Kemp and Kotz, Univariate Discrete Distributions, 3rd ed. 2005, chapters 4 and 5"},
          {"predictive distribution after a past", "Bernardo and Smith, Bayesian Theory, 1994, appendix A.2"},
          {"Jeffreys' prior", "Jeffreys, Theory of Probability, 3rd ed. 1961, section 3.1"}},
     .headline = "chance",
     .answer = answer,
     .examples =
         {R"({"ask":"how_likely","of":{"expected":4.8},"with":{"at_least":8},"words":{"event":"fall","events":"falls"}})",
          R"({"ask":"how_likely","of":{"count":24,"exposure":5},"with":{"next_exposure":1,"at_least":8},"words":{"event":"shutdown","events":"shutdowns","exposure":"years"}})"},
     .light = true,
     .either = {{"expected"}, {"count", "exposure"}}});

}  // namespace countsel
