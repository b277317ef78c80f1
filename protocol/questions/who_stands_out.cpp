// protocol/questions/who_stands_out.cpp -- many units: which differ from the rest beyond chance?
#include <algorithm>
#include <cmath>
#include <numeric>

#include "engine/numbers/random.hpp"
#include "engine/numbers/sums.hpp"
#include "engine/rates/adjust.hpp"
#include "engine/rates/dispersion.hpp"
#include "engine/rates/funnel.hpp"
#include "engine/rates/ranks.hpp"
#include "engine/rates/shrinkage.hpp"
#include "protocol/declare/comparison_options.hpp"
#include "protocol/declare/question.hpp"
#include "protocol/declare/shared_options.hpp"
#include "protocol/wording/numbers.hpp"
#include "protocol/wording/rates.hpp"
#include "protocol/wording/units.hpp"

namespace countsel {
namespace {

struct WhoStandsOut : RateAsked {
  Role label, expected;
  std::optional<double> benchmark;  ///< a rate per `per`, or a ratio to the expected numbers
  bool overall = false;             ///< asked for by name
  double inner = 0.95, outer = 0.998;
  Spread spread = Spread::poisson;
  double winsorise = 0.1;
  Adjust adjust = Adjust::bh;
  double seed = static_cast<double>(default_seed);
  std::optional<double> draws;

  Frame frame() const override { return {per, confidence, exposure.given || expected.given}; }
};

void set_benchmark(WhoStandsOut& asked, const Json& given) {
  if (given.is_string()) {
    if (given.get_ref<const std::string&>() != "overall")
      throw Refusal(Code::bad_value,
                    "benchmark is " + given.dump() + R"(; it should be "overall" or a rate.)");
    asked.overall = true;
    return;
  }
  if (!given.is_number()) bind::wrong_type("benchmark", R"("overall" or a rate)", given);
  if (!(given.get<double>() > 0))
    throw Refusal(Code::bad_value, "benchmark is " + given.dump() + "; a rate to compare with is above 0.");
  asked.benchmark = given.get<double>();
}

void set_bands(WhoStandsOut& asked, const Json& given) {
  const bool two = given.is_array() && given.size() == 2 && given[0].is_number() && given[1].is_number();
  if (!two) bind::wrong_type("bands", "a list of two levels, such as [0.95, 0.998]", given);
  asked.inner = given[0].get<double>();
  asked.outer = given[1].get<double>();
  if (!(asked.inner > 0 && asked.inner < asked.outer && asked.outer < 1)) {
    throw Refusal(Code::bad_value,
                  "bands is " + given.dump() + "; both levels lie between 0 and 1, the inner one first.", {},
                  "The default is [0.95,0.998].");
  }
}

/// Exposures, or the expected numbers in their place, and the benchmark for one of them (NaN: overall).
struct Base {
  std::span<const double> over;
  double benchmark, scale;  ///< rates are stated per `scale` of the base
};

Base base_of(const WhoStandsOut& asked) {
  constexpr double overall = std::numeric_limits<double>::quiet_NaN();
  if (asked.expected.given) {
    const double one = asked.overall ? overall : 1;
    return {asked.expected.numbers, asked.benchmark ? *asked.benchmark : one, 1};
  }
  return {asked.exposure.numbers, asked.benchmark ? *asked.benchmark / asked.per : overall, asked.per};
}

void require_units(const WhoStandsOut& asked, const Base& base, const Wording& wording) {
  if (!std::isnan(base.benchmark)) return;
  if (asked.rows == 1) {
    throw Refusal(Code::too_few, "There is only one unit; nothing can stand out from the rest.",
                  {{asked.label.column, 0}}, "Add the other units, give a benchmark, or ask on_target.");
  }
  if (sum(asked.count.numbers) == 0) {
    throw Refusal(Code::too_few, "No unit has any " + wording.events() + ", so none can stand out.",
                  {{asked.count.column, 0}},
                  "Ask how_often for what no events can tell, or give a benchmark.");
  }
}

/// Units and limits along one axis; of very many units all those outside the bands and an even share of the
/// others.
Picture funnel_picture(const Funnel& result, std::span<const double> counts, const Base& base,
                       const WhoStandsOut& asked, std::vector<double> grid, const Wording& wording) {
  constexpr std::size_t most_drawn = 1800;
  std::vector<std::size_t> drawn(counts.size());
  std::iota(drawn.begin(), drawn.end(), std::size_t{0});
  if (drawn.size() > most_drawn) {
    std::vector<std::size_t> outside, within;
    for (const auto i : drawn) (result.standing[i] == Standing::within ? within : outside).push_back(i);
    const auto even = [](std::vector<std::size_t> all, std::size_t most) {
      if (all.size() <= most) return all;
      std::vector<std::size_t> some;
      for (std::size_t k = 0; k < most; ++k) some.push_back(all[k * all.size() / most]);
      return some;
    };
    drawn = even(outside, most_drawn - 300);
    const auto others = even(within, most_drawn - drawn.size());
    drawn.insert(drawn.end(), others.begin(), others.end());
  }
  struct Point {
    double x, y;
  };
  std::vector<Point> points;
  for (const auto i : drawn) points.push_back({base.over[i], counts[i] / base.over[i] * base.scale});
  for (const double x : grid) points.push_back({x, std::numeric_limits<double>::quiet_NaN()});
  std::stable_sort(points.begin(), points.end(), [](const Point& a, const Point& b) { return a.x < b.x; });
  std::vector<double> x, y;
  for (const auto& point : points) {
    x.push_back(point.x);
    y.push_back(point.y);
  }
  FunnelLimits limits = funnel_limits(x, result.model, asked.inner, asked.outer);
  for (auto* rates : {&limits.low_inner, &limits.high_inner, &limits.low_outer, &limits.high_outer})
    for (double& rate : *rates) rate *= base.scale;
  const double benchmark = result.model.benchmark * base.scale;
  const std::vector<double> centre(x.size(), benchmark);
  const bool ratio = asked.expected.given;
  return {.kind = "funnel",
          .title = (ratio ? "Observed over expected " + wording.events() : capital(wording.rate_unit())) +
                   wording.period(),
          .x_name = ratio ? "expected " + wording.events() : wording.exposure_name(),
          .x = x,
          .y_name = ratio ? "observed over expected" : wording.rate_unit(),
          .series = {{.name = "units", .role = "points", .y = y},
                     {.name = percent_text(asked.inner) + " limits",
                      .role = "band",
                      .y = centre,
                      .low = limits.low_inner,
                      .high = limits.high_inner},
                     {.name = percent_text(asked.outer) + " limits",
                      .role = "band",
                      .y = centre,
                      .low = limits.low_outer,
                      .high = limits.high_outer}},
          .lines = {{"benchmark", benchmark}}};
}

std::vector<Source> methods_of(const WhoStandsOut& asked, const UnitRanks& ranks) {
  std::vector<Source> methods = {
      {"funnel with exact limits", "Spiegelhalter, Statistics in Medicine 24 (2005) 1185-1202"},
      {"exact p-values, twice the smaller tail, at most 1, so that they agree with the limits",
       "Breslow and Day, Statistical Methods in Cancer Research, vol. II, IARC 1987, section 2.3"},
      {"signed normal deviates by mid-p", "Lancaster, J. Amer. Statist. Assoc. 56 (1961) 223-234"}};
  if (asked.spread == Spread::scaled)
    methods.push_back({"variance scaled by the winsorised dispersion, as negative-binomial counts",
                       "Spiegelhalter, Statistics in Medicine 24 (2005) 1185-1202"});
  if (asked.spread == Spread::added)
    methods.push_back({"variance between units added, by the moment estimator on the log scale",
                       "DerSimonian and Laird, Controlled Clinical Trials 7 (1986) 177-188; Spiegelhalter, "
                       "Statistics in Medicine 24 (2005) 1185-1202"});
  if (asked.adjust != Adjust::none) methods.push_back(shared::source_of(asked.adjust));
  methods.push_back({"gamma-Poisson shrinkage, the gamma by marginal likelihood",
                     "Clayton and Kaldor, Biometrics 43 (1987) 671-681"});
  if (ranks.draws > 0)
    methods.push_back({"ranks from " + given_text(static_cast<double>(ranks.draws)) +
                           " posterior draws, seed " + number_text(asked.seed),
                       "Goldstein and Spiegelhalter, J. R. Statist. Soc. A 159 (1996) 385-443"});
  return methods;
}

std::vector<double> times(std::vector<double> values, double factor) {
  for (double& value : values) value *= factor;
  return values;
}

Answer answer(const WhoStandsOut& asked, Context& context) {
  const Wording wording(asked.words, asked.frame());
  const Base base = base_of(asked);
  require_units(asked, base, wording);
  const auto counts = asked.count.numbers;
  const std::size_t n = asked.rows;
  const FunnelSpec spec{base.benchmark,
                        asked.spread == Spread::scaled  ? Widening::scaled
                        : asked.spread == Spread::added ? Widening::added
                                                        : Widening::none,
                        asked.winsorise, asked.inner, asked.outer};
  Funnel result = funnel(counts, base.over, spec);
  context.work.progress.tell(0.2, "shrinking rates");
  const UnitRatePrior prior = fit_unit_rates(counts, base.over, context.work);
  const ShrunkRates shrunk = shrink_rates(counts, base.over, prior, asked.confidence);
  context.work.progress.tell(0.4, "drawing ranks");
  const UnitRanks ranks = rank_units(counts, base.over, prior,
                                     {asked.confidence, static_cast<std::size_t>(asked.draws.value_or(0)),
                                      static_cast<std::uint64_t>(asked.seed)},
                                     context.work);
  const std::vector<double> p_adjusted = adjust_p_values(result.p_value, asked.adjust);
  const auto flagged = static_cast<double>(std::count_if(p_adjusted.begin(), p_adjusted.end(),
                                                         [&](double p) { return p < 1 - asked.confidence; }));
  const auto labels = labels_of(asked.label, asked);

  const double benchmark = result.model.benchmark * base.scale;
  const bool ratio = asked.expected.given;
  // A benchmark that was given has all its digits; one that was found has those it supports.
  const std::string said_benchmark =
      std::isnan(base.benchmark) ? significant_text(benchmark, 3) : given_text(benchmark);
  const SaidUnits said{.labels = labels,
                       .funnel = result,
                       .p_adjusted = p_adjusted,
                       .inner = asked.inner,
                       .outer = asked.outer,
                       .level = 1 - asked.confidence,
                       .benchmark = ratio ? "a ratio of " + said_benchmark + " to what was expected"
                                          : said_benchmark + " " + wording.rate_unit() + wording.period(),
                       .adjustment = asked.adjust == Adjust::none   ? ""
                                     : asked.adjust == Adjust::holm ? "Holm"
                                                                    : "Benjamini and Hochberg"};
  Answer answer{.say = say_units(said)};
  answer.figures = {{"benchmark", benchmark},
                    {"dispersion", result.spread.dispersion},
                    {"between_sd", result.spread.between_sd},
                    {"prior_shape", prior.shape},
                    {"prior_rate", prior.rate},
                    {"flagged", flagged}};

  note_units(said, answer.notes);
  note_ranks(labels, ranks, prior, wording.level(), answer.notes);
  if (asked.spread == Spread::poisson) {
    const std::vector<std::int32_t> one(n, 0);
    note_dispersion(pooled_dispersion(counts, base.over, one, 1), false, wording, answer.notes,
                    R"("spread":"added" (or "scaled") allows for it.)");
  }
  if (ratio) {
    answer.notes.push_back(
        {"ratios", "Benchmark, funnel and shrunk rates are ratios of observed to expected " +
                       wording.events() +
                       ". Two such ratios are not to be compared with "
                       "each other where the units' mixes differ."});
  } else if (!asked.exposure.given) {
    answer.notes.push_back(no_exposure_note(n));
    answer.say += " No exposure was given, so each row counts as 1.";
  }
  note_large_sum(sum(counts), answer.notes);
  if (counts.size() > 1800) {
    answer.notes.push_back({"picture_thinned",
                            "The picture shows all units outside the limits, as far as there is room, and an "
                            "even share of the others."});
  }

  std::vector<double> exposure(asked.exposure.numbers.begin(), asked.exposure.numbers.end());
  if (ratio && !asked.exposure.given) exposure.assign(n, std::numeric_limits<double>::quiet_NaN());
  std::vector<double> rate(n);
  std::vector<std::string> standing(n);
  for (std::size_t i = 0; i < n; ++i) {
    rate[i] = counts[i] / exposure[i] * asked.per;
    standing[i] = standing_name(result.standing[i]);
  }
  const std::vector<double> grid = funnel_exposures(base.over, 100);
  answer.picture = funnel_picture(result, counts, base, asked, grid, wording);
  FunnelLimits limits = funnel_limits(grid, result.model, asked.inner, asked.outer);
  answer.method = methods_of(asked, ranks);
  answer.tables = {{"units",
                    {{"label", labels},
                     {"count", std::vector<double>(counts.begin(), counts.end())},
                     {"exposure", std::move(exposure)},
                     {"rate", std::move(rate)},
                     {"expected", std::move(result.expected)},
                     {"ratio", std::move(result.ratio)},
                     {"z", std::move(result.z)},
                     {"p_value", std::move(result.p_value)},
                     {"p_adjusted", p_adjusted},
                     {"standing", std::move(standing)},
                     {"shrunk_rate", times(shrunk.rate, base.scale)},
                     {"shrunk_low", times(shrunk.low, base.scale)},
                     {"shrunk_high", times(shrunk.high, base.scale)},
                     {"rank", ranks.rank},
                     {"rank_low", ranks.low},
                     {"rank_high", ranks.high}}},
                   {"funnel",
                    {{"exposure", std::move(limits.exposure)},
                     {"low_inner", times(std::move(limits.low_inner), base.scale)},
                     {"high_inner", times(std::move(limits.high_inner), base.scale)},
                     {"low_outer", times(std::move(limits.low_outer), base.scale)},
                     {"high_outer", times(std::move(limits.high_outer), base.scale)}}}};
  return answer;
}

OptionSpec spread_option() {
  return bind::choice("spread", &WhoStandsOut::spread,
                      "how much units vary: as Poisson counts, by a multiple of that variance, or by a "
                      "variance between units added to it",
                      {{"poisson", Spread::poisson}, {"scaled", Spread::scaled}, {"added", Spread::added}});
}
OptionSpec draws_option() {
  auto spec = bind::number("draws", &WhoStandsOut::draws,
                           "how many random draws the ranks' limits rest on; by default fewer for more units")
                  .from(10)
                  .to(1e6);
  spec.type = "whole";
  return spec;
}

}  // namespace

extern const Question who_stands_out = question<WhoStandsOut>(
    {.name = "who_stands_out",
     .asks = "Many units: which differ from the rest beyond chance?",
     .roles = {shared::count(), shared::exposure(),
               bind::role("expected", Holds::above_0, &WhoStandsOut::expected,
                          "events expected in each unit, in place of exposure"),
               bind::role("label", Holds::label, &WhoStandsOut::label, "the units' names", true)},
     .options = {shared::confidence(), shared::per(),
                 bind::custom<WhoStandsOut>("benchmark", "\"overall\" or a rate",
                                            "what units are compared with: all together, or a rate per `per` "
                                            "(a ratio where expected is given; then 1 by default)",
                                            set_benchmark, "overall"),
                 bind::custom<WhoStandsOut>("bands", "list of two levels", "levels of the funnel's limits",
                                            set_bands, Json::array({0.95, 0.998})),
                 spread_option(),
                 bind::number("winsorise", &WhoStandsOut::winsorise,
                              "share of units pulled in at each end before the spread is found")
                     .from(0)
                     .under(0.5),
                 shared::adjust(&WhoStandsOut::adjust), shared::seed(&WhoStandsOut::seed), draws_option()},
     .figures = {{"benchmark", Style::rate, "the rate (or ratio to expected) that units are compared with"},
                 {"dispersion", Style::number, "winsorised mean square of the units' deviates"},
                 {"between_sd", Style::number,
                  "standard deviation between units beyond chance, on the log scale"},
                 {"prior_shape", Style::number, "shape of the gamma of the units' rates"},
                 {"prior_rate", Style::number, "its rate parameter, in exposure units"},
                 {"flagged", Style::whole, "units whose adjusted p-value is below 1 - confidence"}},
     .tables = {{"units",
                 "one row for each unit",
                 {{"label", Style::text, ""},
                  {"count", Style::count, ""},
                  {"exposure", Style::exposure, ""},
                  {"rate", Style::rate, ""},
                  {"expected", Style::number, "{events} expected at the benchmark"},
                  {"ratio", Style::ratio, "ratio to the benchmark"},
                  {"z", Style::statistic, "deviations from the benchmark"},
                  {"p_value", Style::p_value, ""},
                  {"p_adjusted", Style::p_value, "adjusted p-value"},
                  {"standing", Style::level, "standing"},
                  {"shrunk_rate", Style::rate, "", "shrunk_low", "shrunk_high"},
                  {"shrunk_low", Style::rate, ""},
                  {"shrunk_high", Style::rate, ""},
                  {"rank", Style::whole, "rank, 1 the highest"},
                  {"rank_low", Style::whole, "lowest likely rank number"},
                  {"rank_high", Style::whole, "highest likely rank number"}}},
                {"funnel",
                 "the limits by exposure, to be drawn",
                 {{"exposure", Style::exposure, ""},
                  {"low_inner", Style::rate, "lower inner limit"},
                  {"high_inner", Style::rate, "upper inner limit"},
                  {"low_outer", Style::rate, "lower outer limit"},
                  {"high_outer", Style::rate, "upper outer limit"}}}},
     .sources = {{"funnel, winsorised over-dispersion",
                  "Spiegelhalter, Statistics in Medicine 24 (2005) 1185-1202"},
                 {"variance between units by moments",
                  "DerSimonian and Laird, Controlled Clinical Trials 7 (1986) 177-188"},
                 {"gamma-Poisson shrinkage", "Clayton and Kaldor, Biometrics 43 (1987) 671-681"},
                 {"uncertainty of ranks",
                  "Goldstein and Spiegelhalter, J. R. Statist. Soc. A 159 (1996) 385-443"},
                 shared::source_of(Adjust::bh),
                 shared::source_of(Adjust::holm)},
     .headline = "flagged",
     .answer = answer,
     .examples = {
         R"({"ask":"who_stands_out","of":{"label":["Ash","Birch","Cedar","Elm","Fir","Hazel","Larch","Oak"],"count":[3,9,4,21,5,6,2,10],"exposure":[1100,2300,1500,2400,1700,1900,700,2600]},"with":{"per":1000},"words":{"event":"fall","events":"falls","exposure":"bed-days"}})",
         R"({"ask":"who_stands_out","of":{"label":["Ash","Birch","Cedar","Elm"],"count":[3,19,8,30],"expected":[5.1,12.4,9.7,18.2]},"with":{"spread":"added"}})"}});

}  // namespace countsel
