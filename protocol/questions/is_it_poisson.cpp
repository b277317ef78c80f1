// protocol/questions/is_it_poisson.cpp -- can these counts be trusted to behave?
#include <algorithm>
#include <cmath>

#include "engine/numbers/distributions.hpp"
#include "engine/rates/count_fits.hpp"
#include "engine/rates/count_fits_frequencies.hpp"
#include "engine/rates/dispersion_tests.hpp"
#include "engine/rates/zero_test.hpp"
#include "protocol/declare/question.hpp"
#include "protocol/declare/shared_options.hpp"
#include "protocol/wording/numbers.hpp"
#include "protocol/wording/poisson.hpp"
#include "protocol/wording/rates.hpp"

namespace countsel {
namespace {

constexpr double nan = std::numeric_limits<double>::quiet_NaN();

struct IsItPoisson : RateAsked {
  Role value, times;
  Direction direction = Direction::either;
};

CountRows rows_of(const IsItPoisson& asked) {
  if (!asked.value.given) return {asked.count.numbers, asked.exposure.numbers, {}};
  return {asked.value.numbers, {}, asked.times.numbers};
}

void check_source(const IsItPoisson& asked) {
  if (!asked.value.given && !asked.times.given) return;
  if (asked.count.given || asked.exposure.given) {
    const Role& other = asked.count.given ? asked.count : asked.exposure;
    throw Refusal(Code::bad_value,
                  "A frequency table (value and times) is given as well as " +
                      std::string(asked.count.given ? "count" : "exposure") + "; one of them can be used.",
                  {{other.column, 0}}, "Give count and exposure row by row, or value and times.");
  }
}

/// The dispersion that would have shown 8 times in 10, the counts' spread being a multiple of a Poisson's.
double could_show(double df, double level, Direction direction) {
  if (!(df >= 1) || direction == Direction::below) return nan;
  const double tail = direction == Direction::either ? level / 2 : level;
  return gamma_upper_quantile(df / 2, tail) / gamma_quantile(df / 2, 0.2);
}

Picture picture_of(const FrequencyTable& table, const Wording& wording) {
  const auto roots = [](const std::vector<double>& values) {
    std::vector<double> all;
    for (const double value : values) all.push_back(std::sqrt(value));
    return all;
  };
  return {.kind = "bars",
          .title = "Rows by their number of " + wording.events() + ", seen and expected" + wording.period(),
          .x_name = table.width > 1 ? wording.events() + ", classes of " + given_text(table.width)
                                    : wording.events(),
          .x = table.value,
          .y_name = "square root of the number of rows",
          .series = {{.name = "observed", .role = "bars", .y = roots(table.observed)},
                     {.name = "Poisson", .role = "bars", .y = roots(table.poisson)},
                     {.name = "negative binomial", .role = "line", .y = roots(table.negative_binomial)}}};
}

const std::vector<Source>& methods() {
  static const std::vector<Source> all = {
      {"index of dispersion; two-sided twice the smaller tail of chi-square",
       "Fisher, Thornton and Mackenzie, Annals of Applied Biology 9 (1922) 325-359"},
      {"chi-square test of fit, thin classes pooled", "Cochran, Biometrics 10 (1954) 417-451"},
      {"score test for added zeros", "van den Broek, Biometrics 51 (1995) 738-743"},
      {"negative-binomial fit", "Lawless, Canadian J. Statistics 15 (1987) 209-225"},
      {"zero-inflated fits", "Lambert, Technometrics 34 (1992) 1-14"},
      {"AIC", "Akaike, IEEE Trans. Automatic Control 19 (1974) 716-723"},
      {"BIC", "Schwarz, Annals of Statistics 6 (1978) 461-464"},
      {"square-root scale of the picture", "Kleiber and Zeileis, American Statistician 70 (2016) 296-303"}};
  return all;
}

Answer answer(const IsItPoisson& asked, Context& context) {
  check_source(asked);
  const Wording wording(asked.words, asked.frame());
  const CountRows rows = rows_of(asked);
  const CountTotals totals = count_totals(rows);
  if (totals.rows < 2) {
    throw Refusal(Code::too_few,
                  totals.rows == 0 ? "No value was seen even once." : "One count alone cannot vary.", {},
                  "Give the counts row by row (by month, by place), or how often each value was seen.");
  }
  const DispersionTest test = dispersion_test(rows);
  const ZeroTest zeros = zero_test(rows);
  context.work.progress.tell(0.1, "fitting distributions");
  const std::vector<CountFit> fits = fit_count_distributions(rows, context.work);
  const FrequencyTable table = frequency_table(rows, fits[0], fits[1], context.work);
  const GoodnessOfFit fit = totals.events > 0 ? poisson_fit(table) : GoodnessOfFit{nan, nan, nan, {}};
  const double p_value = asked.direction == Direction::above   ? test.p_above
                         : asked.direction == Direction::below ? test.p_below
                                                               : test.p_either;
  const double level = 1 - asked.confidence;
  const auto exposures = rows.exposures;
  const bool uneven = !exposures.empty() && *std::max_element(exposures.begin(), exposures.end()) !=
                                                *std::min_element(exposures.begin(), exposures.end());
  const SaidPoisson said{.test = test,
                         .zeros = zeros,
                         .fits = fits,
                         .rows = totals.rows,
                         .events = totals.events,
                         .p_value = p_value,
                         .level = level,
                         .direction = asked.direction,
                         .could_show = could_show(test.df, level, asked.direction),
                         .exposure = uneven};
  Answer answer{.say = say_poisson(wording, said)};
  answer.figures = {{"mean", test.mean},
                    {"variance", test.variance},
                    {"dispersion", test.dispersion},
                    {"statistic", test.statistic},
                    {"df", test.df},
                    {"p_value", p_value},
                    {"zeros", zeros.zeros},
                    {"zeros_expected", zeros.zeros_expected},
                    {"zeros_statistic", zeros.statistic},
                    {"zeros_p", zeros.p_either},
                    {"fit_statistic", fit.statistic},
                    {"fit_df", fit.df},
                    {"fit_p", fit.p_value}};
  note_poisson(said, smallest_expected(rows), fit.df, answer.notes);
  if (uneven) {
    answer.notes.push_back({"exposures_differ",
                            "Mean and variance are of the counts as they stand; dispersion, zeros and "
                            "frequencies allow for each row's exposure."});
  }
  if (table.width > 1) {
    answer.notes.push_back({"classes", "The counts range so far that frequencies are given for classes of " +
                                           given_text(table.width) + " values, each named by its first."});
  }
  note_large_sum(totals.events, answer.notes);

  std::vector<std::string> names;
  std::vector<double> parameters, loglik, aic, bic;
  for (const auto& one : fits) {
    names.push_back(distribution_name(one.distribution));
    parameters.push_back(static_cast<double>(one.parameters));
    loglik.push_back(one.loglik);
    aic.push_back(one.aic);
    bic.push_back(one.bic);
  }
  answer.method = methods();
  answer.picture = picture_of(table, wording);
  answer.tables = {{"frequencies",
                    {{"value", table.value},
                     {"observed", table.observed},
                     {"poisson", table.poisson},
                     {"negative_binomial", table.negative_binomial}}},
                   {"fits",
                    {{"distribution", std::move(names)},
                     {"parameters", std::move(parameters)},
                     {"loglik", std::move(loglik)},
                     {"aic", std::move(aic)},
                     {"bic", std::move(bic)}}}};
  return answer;
}

}  // namespace

extern const Question is_it_poisson = question<IsItPoisson>(
    {.name = "is_it_poisson",
     .asks = "Can these counts be trusted to behave like Poisson counts?",
     .roles = {bind::role("count", Holds::count, &RateAsked::count, "events counted in each row"),
               shared::exposure(),
               bind::role("value", Holds::count, &IsItPoisson::value,
                          "in place of count: a number of events"),
               bind::role("times", Holds::count, &IsItPoisson::times,
                          "how many rows had that number of events")},
     .options = {shared::confidence(), shared::direction(&IsItPoisson::direction)},
     .figures = {{"mean", Style::number, "mean count of a row"},
                 {"variance", Style::number, "variance of the counts"},
                 {"dispersion", Style::number, "index of dispersion over its degrees of freedom"},
                 {"statistic", Style::statistic, "index of dispersion"},
                 {"df", Style::whole, "rows less 1"},
                 {"p_value", Style::p_value, "chance of such a dispersion from Poisson counts"},
                 {"zeros", Style::count, "rows without events"},
                 {"zeros_expected", Style::number, "rows without events that Poisson counts would show"},
                 {"zeros_statistic", Style::statistic, "score statistic of added zeros"},
                 {"zeros_p", Style::p_value, "its p-value"},
                 {"fit_statistic", Style::statistic, "chi-square of fit, thin classes pooled"},
                 {"fit_df", Style::whole, "its degrees of freedom"},
                 {"fit_p", Style::p_value, "its p-value"}},
     .tables = {{"frequencies",
                 "rows by their number of events, seen and expected",
                 {{"value", Style::whole, "{events}"},
                  {"observed", Style::count, "rows observed"},
                  {"poisson", Style::number, "expected, Poisson"},
                  {"negative_binomial", Style::number, "expected, negative binomial"}}},
                {"fits",
                 "four distributions side by side",
                 {{"distribution", Style::level, "distribution"},
                  {"parameters", Style::whole, "parameters"},
                  {"loglik", Style::statistic, "log likelihood"},
                  {"aic", Style::statistic, "AIC"},
                  {"bic", Style::statistic, "BIC"}}}},
     .sources = methods(),
     .headline = "dispersion",
     .answer = answer,
     .examples =
         {R"({"ask":"is_it_poisson","of":{"value":[0,1,2,3,4],"times":[109,65,22,3,1]},"words":{"event":"death","events":"deaths"}})",
          R"({"ask":"is_it_poisson","of":{"count":[3,0,7,1,12,2,0,4,9,1],"exposure":[12,9,15,11,14,10,8,13,16,9]},"words":{"event":"burst","events":"bursts","exposure":"km-years"}})"},
     .either = {{"count"}, {"value", "times"}}});

}  // namespace countsel
