// protocol/questions/on_target.cpp -- are we above or below what was expected or allowed?
#include <algorithm>
#include <cmath>

#include "engine/numbers/sums.hpp"
#include "engine/rates/expected_could_show.hpp"
#include "engine/rates/expected_ratio.hpp"
#include "protocol/declare/comparison_options.hpp"
#include "protocol/declare/question.hpp"
#include "protocol/declare/shared_options.hpp"
#include "protocol/wording/expected.hpp"
#include "protocol/wording/numbers.hpp"
#include "protocol/wording/rates.hpp"

namespace countsel {
namespace {

struct OnTarget : RateAsked {
  Role label, expected, target, past_count, past_exposure;
  std::optional<double> target_rate;
  TestMethod test = TestMethod::exact;
  RateMethod limits = RateMethod::exact;
  Side side = Side::both;
  Direction direction = Direction::either;
  Adjust adjust = Adjust::none;
};

const auto test_names = [] {
  auto names = shared::test_methods();
  std::erase_if(names, [](const auto& one) { return one.second == TestMethod::e_test; });
  return names;
}();
const auto limit_names = [] {
  auto names = shared::rate_methods();
  std::erase_if(names, [](const auto& one) { return one.second == RateMethod::bayes; });
  return names;
}();

Source test_source(TestMethod method) {
  switch (method) {
    case TestMethod::exact:
      return {"exact Poisson test; two-sided twice the smaller tail, so that it agrees with the exact limits",
              "Breslow and Day, Statistical Methods in Cancer Research, vol. II, IARC 1987, section 2.3"};
    case TestMethod::mid_p:
      return {"mid-p Poisson test; two-sided twice the smaller tail",
              "Lancaster, J. Amer. Statist. Assoc. 56 (1961) 223-234"};
    case TestMethod::score:
      return {"score test, (count - expected)^2 / expected",
              "Breslow and Day, Statistical Methods in Cancer Research, vol. II, IARC 1987, section 2.3"};
    default:
      return {"likelihood-ratio test", "Wilks, Annals of Mathematical Statistics 9 (1938) 60-62"};
  }
}
const Source past_source = {
    "limits and test of the ratio of present and past rate, conditional on the sum of both counts",
    "Przyborowski and Wilenski, Biometrika 31 (1940) 313-323; Silcocks, J. Epidemiology and Community Health "
    "48 (1994) 313-317"};
const Source pasts_source = {"ratio of a count to a weighted sum of past counts, matched by two moments",
                             "Fay, Communications in Statistics, Theory and Methods 28 (1999) 2141-2160"};

/// The one thing that says what to expect; refuses none and more than one.
Expectation expectation_of(const OnTarget& asked) {
  std::vector<std::string> given;
  if (asked.expected.given) given.emplace_back("the role expected");
  if (asked.target.given) given.emplace_back("the role target");
  if (asked.target_rate) given.emplace_back("with.target_rate");
  if (asked.past_count.given || asked.past_exposure.given) given.emplace_back("the past");
  const char* hint =
      "Give one of: expected (a number for each row), target (a rate for each row), with.target_rate (one "
      "rate "
      "for all), or past_count and past_exposure.";
  if (given.empty()) throw Refusal(Code::missing, "on_target is not told what was expected.", {}, hint);
  if (given.size() > 1)
    throw Refusal(Code::bad_value, "What was expected is given in more than one way: " + listed(given) + ".",
                  {}, hint);
  if (asked.past_count.given != asked.past_exposure.given)
    throw Refusal(Code::missing,
                  std::string("The past needs both its count and its exposure; ") +
                      (asked.past_count.given ? "past_exposure" : "past_count") + " is missing.",
                  {}, hint);
  return asked.expected.given     ? Expectation::number
         : asked.past_count.given ? Expectation::past
                                  : Expectation::target;
}

ExpectedSpec spec_of(const OnTarget& asked) {
  ExpectedSpec spec{.test = asked.test, .direction = asked.direction, .limits = {}};
  spec.limits.method = asked.limits;
  spec.limits.confidence = asked.confidence;
  spec.limits.side = asked.side;
  return spec;
}

struct Compared {
  std::vector<ExpectedRatio> rows;
  ExpectedRatio all;
};

Compared against_pasts(const OnTarget& asked, const Work& work, std::vector<Note>& notes) {
  const auto spec = spec_of(asked);
  Compared compared{};
  std::vector<PresentAndPast> pasts;
  for (std::size_t i = 0; i < asked.rows; ++i) {
    pasts.push_back({asked.count.numbers[i], asked.exposure.numbers[i], asked.past_count.numbers[i],
                     asked.past_exposure.numbers[i]});
    compared.rows.push_back(count_over_past(pasts.back(), spec));
    if (i % 64 == 0) work.progress.check();
  }
  const bool joint_limits = asked.limits == RateMethod::exact || asked.limits == RateMethod::mid_p;
  const bool joint_test = asked.test == TestMethod::exact || asked.test == TestMethod::mid_p;
  if (pasts_share_one_ratio(pasts) || (joint_limits && joint_test)) {
    compared.all = counts_over_pasts(pasts, spec);
    return compared;
  }
  Sum expected;
  for (const auto& row : compared.rows) expected.add(row.expected);
  const double count = sum(asked.count.numbers), mean = expected.value();
  compared.all = {count, mean, count / mean, NAN, NAN, NAN};
  notes.push_back({"no_limits",
                   "The rows' pasts are of different length; taken together they have limits and a test only "
                   "with \"exact\" or \"mid-p\" for both."});
  return compared;
}

Compared against_numbers(const OnTarget& asked, const std::vector<double>& expected, const Work& work) {
  const auto spec = spec_of(asked);
  const std::string& source = asked.expected.given ? asked.expected.column : asked.target.column;
  std::vector<Place> events_unexpected;
  for (std::size_t i = 0; i < asked.rows; ++i) {
    if (expected[i] == 0 && asked.count.numbers[i] > 0)
      events_unexpected.push_back({source, asked.row_number(i)});
  }
  if (!events_unexpected.empty()) {
    const auto n = events_unexpected.size();
    throw Refusal(
        Code::bad_value,
        (source.empty() ? "With a target_rate of 0 nothing is expected"
                        : "Nothing is expected in row " + std::to_string(events_unexpected.front().row)) +
            ", yet events happened; their ratio has no value." +
            (n > 1 ? " There are " + std::to_string(n) + " such rows." : ""),
        source.empty() ? std::vector<Place>{} : events_unexpected,
        "Give what was expected with its decimals, or leave such rows out.");
  }
  Compared compared{};
  for (std::size_t i = 0; i < asked.rows; ++i) {
    compared.rows.push_back(count_over_expected(asked.count.numbers[i], expected[i], spec));
    if (i % 64 == 0) work.progress.check();
  }
  compared.all = count_over_expected(sum(asked.count.numbers), sum(expected), spec);
  return compared;
}

/// Rows that stray from their expected numbers by more than the ratio of all together explains.
void note_uneven_rows(const OnTarget& asked, const Compared& compared, std::vector<Note>& notes) {
  std::vector<double> counts, expected;
  for (const auto& row : compared.rows) {
    if (!(row.expected > 0)) continue;
    counts.push_back(row.count);
    expected.push_back(row.expected);
  }
  if (counts.size() < 2) return;
  const std::vector<std::int32_t> one(counts.size(), 0);
  const Dispersion spread = pooled_dispersion(counts, expected, one, 1);
  if (!(spread.df > 0) || spread.phi <= 1 || !(dispersion_p(spread) < 0.01)) return;
  notes.push_back(
      {"over_dispersed",
       "The rows' ratios vary " + significant_text(spread.phi, 2) +
           " times as much as chance would have them (chance of so much: " + p_text(dispersion_p(spread)) +
           "): read the rows rather than the ratio of all together, whose limits are too narrow" +
           (asked.past_count.given ? ", though the pasts' own doubt is part of it." : ".")});
}

Answer answer(const OnTarget& asked, Context& context) {
  const Expectation from = expectation_of(asked);
  const Wording wording(asked.words, asked.frame());
  Answer answer;
  std::vector<double> expected(asked.rows);
  for (std::size_t i = 0; i < asked.rows; ++i) {
    expected[i] = from == Expectation::number ? asked.expected.numbers[i]
                  : from == Expectation::target
                      ? (asked.target_rate ? *asked.target_rate : asked.target.numbers[i]) / asked.per *
                            asked.exposure.numbers[i]
                      : 0;
  }
  const Compared compared = from == Expectation::past ? against_pasts(asked, context.work, answer.notes)
                                                      : against_numbers(asked, expected, context.work);
  const auto& all = compared.all;
  const auto labels = labels_of(asked.label, asked);
  std::vector<double> rate, ratio, low, high, p_value;
  for (std::size_t i = 0; i < asked.rows; ++i) {
    const auto& row = compared.rows[i];
    expected[i] = row.expected;
    rate.push_back(row.count / asked.exposure.numbers[i] * asked.per);
    ratio.push_back(row.ratio);
    low.push_back(row.low);
    high.push_back(row.high);
    p_value.push_back(row.p_value);
  }
  auto p_adjusted = adjust_p_values(p_value, asked.adjust);

  double target = asked.target_rate.value_or(NAN);
  if (asked.target.given) {
    const auto& targets = asked.target.numbers;
    const bool one = std::all_of(targets.begin(), targets.end(), [&](double t) { return t == targets[0]; });
    if (one) target = targets[0];
  }
  const double exposure = sum(asked.exposure.numbers), level = 1 - asked.confidence;
  const SaidExpected said{
      .all = all,
      .from = from,
      .exposure = exposure,
      .rate = all.count / exposure * asked.per,
      .target = target,
      .could = from == Expectation::past
                   ? CouldShow{NAN, NAN}
                   : expected_could_show(all.expected, asked.test, asked.confidence, asked.direction),
      .side = asked.side,
      .direction = asked.direction,
      .level = level,
      .limits = method_words(asked.limits, false),
      .test = shared::name_of(asked.test, test_names),
      .exposure_given = asked.exposure.given};
  answer.say = say_expected(wording, said);
  if (asked.rows > 1) {
    const auto beyond = say_beyond(labels, compared.rows, p_adjusted, level, asked.adjust != Adjust::none);
    if (!beyond.empty()) answer.say += " " + beyond;
  }

  note_uneven_rows(asked, compared, answer.notes);
  note_small_count(all.count, wording, answer.notes);
  note_large_sum(all.count, answer.notes);
  note_no_limits(labels, low, high, asked.limits, false, answer.notes);
  if (!asked.exposure.given) answer.notes.push_back(no_exposure_note(asked.rows));
  if (from != Expectation::past)
    answer.notes.push_back(
        {"expected_fixed",
         "What was expected is taken as known without error. Where it was estimated from a "
         "past of its own, past_count and past_exposure widen the limits by that doubt."});
  if (asked.rows > 4 && asked.adjust == Adjust::none)
    answer.notes.push_back(
        {"many_tests", "Of " + std::to_string(asked.rows) + " rows, about one in " +
                           significant_text(1 / level, 2) +
                           R"( looks beyond chance by chance alone; "adjust":"holm" or "bh" )"
                           "allows for it."});

  if (from == Expectation::past) {
    answer.method = {past_source};
    if (asked.rows > 1) answer.method.push_back(pasts_source);
  } else {
    answer.method = {shared::source_of(asked.limits), test_source(asked.test)};
  }
  if (asked.adjust != Adjust::none) answer.method.push_back(shared::source_of(asked.adjust));

  answer.figures = {{"count", all.count}, {"expected", all.expected}, {"ratio", all.ratio},
                    {"low", all.low},     {"high", all.high},         {"p_value", all.p_value}};
  Picture picture{.kind = "limits",
                  .title = capital(wording.events()) + " over what was expected" + wording.period(),
                  .x_name = asked.label.given ? asked.label.column : "row",
                  .x = labels,
                  .y_name = wording.events() + " / expected",
                  .series = {{.name = "ratio with " + wording.level() + " limits",
                              .role = "points",
                              .y = ratio,
                              .low = low,
                              .high = high}},
                  .lines = {{"as expected", 1}}};
  if (asked.rows > 1 && std::isfinite(all.ratio)) picture.lines.emplace_back("all together", all.ratio);
  answer.picture = std::move(picture);
  answer.tables = {
      {"comparison",
       {{"label", labels},
        {"count", std::vector<double>(asked.count.numbers.begin(), asked.count.numbers.end())},
        {"exposure", std::vector<double>(asked.exposure.numbers.begin(), asked.exposure.numbers.end())},
        {"rate", std::move(rate)},
        {"expected", std::move(expected)},
        {"ratio", std::move(ratio)},
        {"low", std::move(low)},
        {"high", std::move(high)},
        {"p_value", std::move(p_value)},
        {"p_adjusted", std::move(p_adjusted)}}}};
  return answer;
}

std::vector<Source> sources() {
  std::vector<Source> all;
  for (const auto& [name, method] : limit_names) all.push_back(shared::source_of(method));
  for (const auto& [name, method] : test_names) all.push_back(test_source(method));
  all.insert(all.end(),
             {past_source, pasts_source, shared::source_of(Adjust::holm), shared::source_of(Adjust::bh)});
  return all;
}

}  // namespace

extern const Question on_target = question<OnTarget>(
    {.name = "on_target",
     .asks = "Are we above or below what was expected or allowed?",
     .roles = {shared::count(), shared::exposure(),
               bind::role("label", Holds::label, &OnTarget::label, "a name for each row"),
               bind::role("expected", Holds::not_below_0, &OnTarget::expected, "events expected in each row"),
               bind::role("target", Holds::not_below_0, &OnTarget::target,
                          "each row's target, a rate per `per`"),
               bind::role("past_count", Holds::count, &OnTarget::past_count,
                          "events of the past that says what to expect"),
               bind::role("past_exposure", Holds::exposure, &OnTarget::past_exposure,
                          "how much was observed in that past")},
     .options = {shared::confidence(), shared::per(),
                 bind::number("target_rate", &OnTarget::target_rate, "one target for all rows",
                              "rate per `per`")
                     .from(0),
                 bind::choice("test", &OnTarget::test, "how the p-value is found", test_names),
                 bind::choice("limits", &OnTarget::limits, "how the ratio's limits are found", limit_names),
                 shared::side(&OnTarget::side), shared::direction(&OnTarget::direction),
                 shared::adjust(&OnTarget::adjust)},
     .figures = {{"count", Style::count, "events in all"},
                 {"expected", Style::number, "events expected in all"},
                 {"ratio", Style::ratio, "count over expected", "low", "high"},
                 {"low", Style::ratio, "lower limit of the ratio"},
                 {"high", Style::ratio, "upper limit of the ratio"},
                 {"p_value", Style::p_value, "p-value of a mean as expected"}},
     .tables = {{"comparison",
                 "one row for each row",
                 {{"label", Style::text, ""},
                  {"count", Style::count, ""},
                  {"exposure", Style::exposure, ""},
                  {"rate", Style::rate, ""},
                  {"expected", Style::number, "expected {events}"},
                  {"ratio", Style::ratio, "count over expected", "low", "high"},
                  {"low", Style::ratio, ""},
                  {"high", Style::ratio, ""},
                  {"p_value", Style::p_value, ""},
                  {"p_adjusted", Style::p_value, "adjusted p-value"}}}},
     .sources = sources(),
     .headline = "ratio",
     .answer = answer,
     .examples = {
         R"({"ask":"on_target","of":{"count":[12,3,7],"expected":[7.3,4.1,6.6],"label":["North","East","South"]},"words":{"event":"fall","events":"falls"}})",
         R"({"ask":"on_target","of":{"count":5,"exposure":1200},"with":{"target_rate":2.5,"per":1000}})",
         R"({"ask":"on_target","of":{"count":14,"exposure":2300,"past_count":31,"past_exposure":8700},"with":{"per":1000}})"}});

}  // namespace countsel
