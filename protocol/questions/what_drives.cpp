// protocol/questions/what_drives.cpp -- rate ratios with other things held fixed.
#include <algorithm>
#include <cmath>
#include <numeric>

#include "engine/models/covariance.hpp"
#include "engine/models/glm.hpp"
#include "engine/models/patterns.hpp"
#include "engine/models/term_tests.hpp"
#include "engine/numbers/distributions.hpp"
#include "protocol/declare/shared_options.hpp"
#include "protocol/questions/terms.hpp"
#include "protocol/wording/drivers.hpp"
#include "protocol/wording/rates.hpp"

namespace countsel {
namespace {

enum class Errors { model, robust, clustered, scaled };
enum class ModelLimits { wald };
enum class Family { poisson, quasi_poisson };
enum class LinkName { log };

struct WhatDrives : RateAsked {
  Role weight, cluster;
  AskedTerms terms;
  Family family = Family::poisson;
  LinkName link = LinkName::log;
  Errors errors = Errors::model;
  RobustKind robust_kind = RobustKind::hc1;
  ClusterKind cluster_kind = ClusterKind::cr1;
  ModelLimits limits = ModelLimits::wald;
  WeightsAre weights_are = WeightsAre::frequency;
  bool covariance = false;

  bool scaled() const { return family == Family::quasi_poisson || errors == Errors::scaled; }
};

void set_terms(WhatDrives& asked, const Json& given) { read_terms(asked.terms, given); }
void set_reference(WhatDrives& asked, const Json& given) { read_references(asked.terms, given); }

std::vector<std::pair<std::string, Holds>> term_columns(WhatDrives& asked,
                                                        const std::vector<const Column*>& columns,
                                                        std::vector<Note>& notes) {
  return columns_for_terms(asked.terms, columns, notes);
}

Covariance covariance_of(const WhatDrives& asked, const GlmFit& fit, const Work& work) {
  if (asked.scaled()) return scaled_covariance(fit);
  if (asked.errors == Errors::robust) return robust_covariance(fit, asked.robust_kind, work);
  if (asked.errors == Errors::clustered)
    return clustered_covariance(fit, asked.cluster.codes, asked.cluster_kind, work);
  return {fit.covariance, fit.errors, 1, 0, 0};
}

Source error_source(const WhatDrives& asked) {
  if (asked.scaled())
    return {"scaled errors, Pearson's statistic over its degrees of freedom",
            "McCullagh and Nelder, Generalized Linear Models, 2nd ed. 1989, section 6.2"};
  if (asked.errors == Errors::robust) {
    return {"robust (sandwich) errors, " + std::string(asked.robust_kind == RobustKind::hc0   ? "HC0"
                                                       : asked.robust_kind == RobustKind::hc1 ? "HC1"
                                                       : asked.robust_kind == RobustKind::hc2 ? "HC2"
                                                                                              : "HC3"),
            "White, Econometrica 48 (1980) 817-838; MacKinnon and White, J. Econometrics 29 (1985) 305-325"};
  }
  if (asked.errors == Errors::clustered)
    return {"errors by cluster", "Liang and Zeger, Biometrika 73 (1986) 13-22"};
  return {"model errors from the expected information",
          "McCullagh and Nelder, Generalized Linear Models, 2nd ed. 1989, section 2.5"};
}

/// The table of ratios, column by column.
struct Ratios {
  std::vector<std::string> term;
  std::vector<OptionalText> level;
  std::vector<double> ratio, low, high, p_value, log_ratio, log_error, z;
  std::vector<SaidRatio> said;
};

Ratios ratios_of(const WhatDrives& asked, const Design& design, const GlmFit& fit,
                 const Covariance& covariance) {
  const double tail = (1 - asked.confidence) / 2;
  const double quantile = asked.scaled() ? (fit.df > 0 ? student_upper_quantile(tail, fit.df) : NAN)
                                         : normal_upper_quantile(tail);
  Ratios table;
  for (const auto& row : design.table) {
    double log_ratio = 0, error = NAN, z = NAN, p = NAN, low = NAN, high = NAN;
    if (row.coefficient) {
      const auto i = static_cast<Eigen::Index>(*row.coefficient);
      log_ratio = fit.coefficients[i];
      error = fit.status[*row.coefficient] == CoefficientStatus::finite ? covariance.errors[i] : NAN;
      if (!row.term) log_ratio += std::log(asked.per);
      z = error > 0 ? log_ratio / error : NAN;
      p = asked.scaled() ? (fit.df > 0 ? 2 * student_above(std::abs(z), fit.df) : NAN)
                         : 2 * normal_above(std::abs(z));
      low = std::exp(log_ratio - quantile * error);
      high = std::exp(log_ratio + quantile * error);
    }
    table.term.push_back(row.name);
    table.level.push_back(row.level);
    table.ratio.push_back(std::exp(log_ratio));
    table.low.push_back(low);
    table.high.push_back(high);
    table.p_value.push_back(p);
    table.log_ratio.push_back(log_ratio);
    table.log_error.push_back(error);
    table.z.push_back(z);
    table.said.push_back({row.name, row.level, std::exp(log_ratio), low, high, !row.coefficient});
  }
  return table;
}

OutTable covariance_table(const Design& design, const Eigen::MatrixXd& matrix) {
  OutTable table{"covariance", {}};
  std::vector<std::string> names;
  for (Eigen::Index i = 0; i < matrix.rows(); ++i)
    names.push_back(design.coefficient_name(static_cast<std::size_t>(i)));
  table.columns.emplace_back("coefficient", names);
  for (Eigen::Index j = 0; j < matrix.cols(); ++j) {
    table.columns.emplace_back(
        names[static_cast<std::size_t>(j)],
        std::vector<double>(matrix.col(j).data(), matrix.col(j).data() + matrix.rows()));
  }
  return table;
}

Picture picture_of(const Wording& wording, const Ratios& ratios) {
  Picture picture{
      .kind = "limits",
      .title = "What goes with " + wording.rate_unit() + wording.period() + ", other terms held fixed",
      .x_name = "term and level",
      .x = {},
      .y_name = "rate ratio",
      .series = {{.name = "rate ratio with " + wording.level() + " limits", .role = "points", .y = {}}},
      .lines = {{"no difference", 1}}};
  std::vector<std::string> labels;
  auto& series = picture.series.front();
  for (std::size_t i = 1; i < ratios.term.size(); ++i) {
    if (ratios.said[i].reference) continue;
    labels.push_back(ratios.level[i] ? ratios.term[i] + ": " + *ratios.level[i] : ratios.term[i]);
    series.y.push_back(ratios.ratio[i]);
    series.low.push_back(ratios.low[i]);
    series.high.push_back(ratios.high[i]);
  }
  picture.x = std::move(labels);
  return picture;
}

Answer answer(const WhatDrives& asked, Context& context) {
  if (asked.errors == Errors::clustered && !asked.cluster.given) {
    throw Refusal(Code::missing, "Clustered errors need the role cluster.", {},
                  "Name the column of clusters in of.roles.");
  }
  const auto model = engine_terms(asked.terms, asked.extra);
  std::vector<double> seen(asked.exposure.numbers.begin(), asked.weight.given
                                                               ? asked.exposure.numbers.end()
                                                               : asked.exposure.numbers.begin());
  for (std::size_t i = 0; i < seen.size(); ++i) seen[i] *= asked.weight.numbers[i];
  const Design design =
      make_design(model.columns, model.terms, asked.rows,
                  asked.weight.given ? std::span<const double>(seen) : asked.exposure.numbers, context.work);
  GlmData data;
  data.count = asked.count.numbers;
  if (asked.exposure.given) data.exposure = asked.exposure.numbers;
  if (asked.weight.given) data.weight = asked.weight.numbers;
  data.weights_are = asked.weights_are;
  const GlmFit fit = fit_poisson(design, data, context.work);
  const Covariance covariance = covariance_of(asked, fit, context.work);

  context.work.progress.tell(0.6, "weighing the terms");
  auto tests = asked.scaled() ? scaled_term_tests(fit, fit.dispersion, context.work)
                              : likelihood_term_tests(fit, context.work);
  if (asked.errors == Errors::robust || asked.errors == Errors::clustered)
    wald_term_tests(fit, covariance.matrix, tests);
  std::stable_sort(tests.begin(), tests.end(),
                   [](const TermTest& a, const TermTest& b) { return a.deviance_lost > b.deviance_lost; });

  const Ratios ratios = ratios_of(asked, design, fit, covariance);
  const Wording wording(asked.words, asked.frame());
  const bool quasi = asked.family == Family::quasi_poisson;
  Answer answer;
  answer.say = say_drivers(wording, design, ratios.said, tests, 1 - asked.confidence, fit.rows);
  answer.figures = {{"rows", fit.rows},
                    {"patterns", static_cast<double>(count_patterns(design, context.work))},
                    {"loglik", fit.loglik},
                    {"deviance", fit.deviance},
                    {"df", fit.df},
                    {"pearson", fit.pearson},
                    {"dispersion", fit.dispersion},
                    {"aic", quasi ? NAN : fit.aic()},
                    {"bic", quasi ? NAN : fit.bic()},
                    {"overdispersion", NAN},
                    {"iterations", static_cast<double>(fit.iterations)},
                    {"converged", fit.converged}};
  std::vector<std::string> term_names;
  std::vector<double> share, statistic, df, p_value;
  for (const auto& test : tests) {
    term_names.push_back(design.terms[test.term].name);
    share.push_back(test.deviance_share);
    statistic.push_back(test.statistic);
    df.push_back(test.df);
    p_value.push_back(test.p_value);
  }
  answer.tables = {{"ratios",
                    {{"term", ratios.term},
                     {"level", ratios.level},
                     {"ratio", ratios.ratio},
                     {"low", ratios.low},
                     {"high", ratios.high},
                     {"p_value", ratios.p_value},
                     {"log_ratio", ratios.log_ratio},
                     {"log_error", ratios.log_error},
                     {"z", ratios.z}}},
                   {"terms",
                    {{"term", term_names},
                     {"deviance_share", share},
                     {"statistic", statistic},
                     {"df", df},
                     {"p_value", p_value}}}};
  if (asked.covariance) answer.tables.push_back(covariance_table(design, covariance.matrix));
  if (ratios.term.size() > 1) answer.picture = picture_of(wording, ratios);

  answer.method = {{"Poisson regression with log link, maximum likelihood",
                    "McCullagh and Nelder, Generalized Linear Models, 2nd ed. 1989, chapters 2 and 6"},
                   error_source(asked)};
  if (!tests.empty()) {
    answer.method.push_back(
        asked.scaled() ? Source{"analysis of deviance, F tests",
                                "McCullagh and Nelder, Generalized Linear Models, 2nd ed. 1989, section 6.5"}
        : asked.errors == Errors::model
            ? Source{"analysis of deviance, likelihood-ratio tests",
                     "McCullagh and Nelder, Generalized Linear Models, 2nd ed. 1989, section 2.3"}
            : Source{"joint Wald tests", "Wald, Trans. Amer. Math. Soc. 54 (1943) 426-482"});
  }
  note_fit(wording, design, fit, asked.scaled(),
           asked.errors == Errors::robust || asked.errors == Errors::clustered, answer.notes);
  if (covariance.undefined_rows > 0) {
    answer.notes.push_back(
        {"no_errors", "These robust errors are not defined: " + std::to_string(covariance.undefined_rows) +
                          (covariance.undefined_rows == 1 ? " row is" : " rows are") +
                          " fitted exactly (leverage 1); \"robust_kind\":\"hc1\" is."});
  }
  if (asked.errors == Errors::clustered && covariance.clusters < 2) {
    answer.notes.push_back(
        {"no_errors", "There is only one cluster, which tells nothing about how clusters vary."});
  } else if (asked.errors == Errors::clustered && covariance.clusters < 20) {
    answer.notes.push_back({"few_clusters", "Only " + std::to_string(covariance.clusters) +
                                                " clusters: errors by cluster are then often too small."});
  }
  if (!asked.exposure.given) answer.notes.push_back(no_exposure_note(asked.rows));
  note_large_sum(std::accumulate(asked.count.numbers.begin(), asked.count.numbers.end(), 0.0), answer.notes);
  return answer;
}

}  // namespace

extern const Question what_drives = question<WhatDrives>(
    {.name = "what_drives",
     .asks = "What drives the rate, with other things held fixed?",
     .roles = {shared::count(), shared::exposure(),
               bind::role("weight", Holds::not_below_0, &WhatDrives::weight,
                          "how often a row counts, or how precise it is"),
               bind::role("cluster", Holds::levels, &WhatDrives::cluster,
                          "rows of one cluster belong together")},
     .options =
         {shared::confidence(), shared::per(),
          bind::custom<WhatDrives>("terms", "list of terms",
                                   "column names (numbers are slopes, texts are levels) or {\"levels\":c}, "
                                   "{\"log\":c,\"plus\":1}, {\"power\":c,\"to\":2}, {\"cross\":[c,d]}; "
                                   "absent: every column without a role",
                                   set_terms),
          bind::custom<WhatDrives>(
              "reference", "object",
              "the level that others are compared with, by column; by default the one with most exposure",
              set_reference),
          bind::choice("family", &WhatDrives::family, "how counts vary round their mean",
                       {{"poisson", Family::poisson}, {"quasi-poisson", Family::quasi_poisson}}),
          bind::choice("link", &WhatDrives::link, "on which scale terms add up", {{"log", LinkName::log}}),
          bind::choice("errors", &WhatDrives::errors, "how standard errors are found",
                       {{"model", Errors::model},
                        {"robust", Errors::robust},
                        {"clustered", Errors::clustered},
                        {"scaled", Errors::scaled}}),
          bind::choice("robust_kind", &WhatDrives::robust_kind, "which robust errors",
                       {{"hc0", RobustKind::hc0},
                        {"hc1", RobustKind::hc1},
                        {"hc2", RobustKind::hc2},
                        {"hc3", RobustKind::hc3}}),
          bind::choice("cluster_kind", &WhatDrives::cluster_kind, "which errors by cluster",
                       {{"cr0", ClusterKind::cr0}, {"cr1", ClusterKind::cr1}}),
          bind::choice("limits", &WhatDrives::limits, "how the limits are found",
                       {{"wald", ModelLimits::wald}}),
          bind::choice("weights_are", &WhatDrives::weights_are, "what weights mean",
                       {{"frequency", WeightsAre::frequency}, {"precision", WeightsAre::precision}}),
          bind::flag("covariance", &WhatDrives::covariance, "whether the table covariance is wanted")},
     .figures = {{"rows", Style::whole, "rows used (the sum of frequency weights)"},
                 {"patterns", Style::whole, "different rows, as the terms see them"},
                 {"loglik", Style::statistic, "log-likelihood with its constants"},
                 {"deviance", Style::statistic, "residual deviance"},
                 {"df", Style::whole, "residual degrees of freedom"},
                 {"pearson", Style::statistic, "Pearson's statistic"},
                 {"dispersion", Style::number, "Pearson's statistic over the degrees of freedom"},
                 {"aic", Style::statistic, "Akaike's criterion"},
                 {"bic", Style::statistic, "Schwarz's criterion"},
                 {"overdispersion", Style::number,
                  "the family's own over-dispersion parameter; null for Poisson"},
                 {"iterations", Style::whole, "passes over all rows"},
                 {"converged", Style::text, "whether the fit settled"}},
     .tables = {{"ratios",
                 "baseline, then each term's slopes or levels",
                 {{"term", Style::text, ""},
                  {"level", Style::level, ""},
                  {"ratio", Style::ratio, "", "low", "high"},
                  {"low", Style::ratio, ""},
                  {"high", Style::ratio, ""},
                  {"p_value", Style::p_value, ""},
                  {"log_ratio", Style::log, "log of the ratio"},
                  {"log_error", Style::log, "its standard error"},
                  {"z", Style::statistic, ""}}},
                {"terms",
                 "each term, strongest first",
                 {{"term", Style::text, ""},
                  {"deviance_share", Style::share, "share of the deviance lost without it"},
                  {"statistic", Style::statistic, ""},
                  {"df", Style::whole, "degrees of freedom"},
                  {"p_value", Style::p_value, ""}}},
                {"covariance", "of the coefficients, where wanted", {{"coefficient", Style::text, ""}}}},
     .sources =
         {{"Poisson regression with log link, maximum likelihood",
           "McCullagh and Nelder, Generalized Linear Models, 2nd ed. 1989"},
          {"robust (sandwich) errors",
           "White, Econometrica 48 (1980) 817-838; MacKinnon and White, J. Econometrics 29 (1985) 305-325"},
          {"errors by cluster", "Liang and Zeger, Biometrika 73 (1986) 13-22"},
          {"separation", "Correia, Guimaraes and Zylkin, arXiv:1903.01633 (2019)"}},
     .headline = "dispersion",
     .answer = answer,
     .extra_columns = term_columns,
     .examples = {
         R"({"ask":"what_drives","of":{"columns":{"bursts":[3,0,5,2,9,1],"km_years":[12,9,15,11,14,10],"material":["iron","pvc","iron","pvc","iron","pvc"],"age":[40,10,55,20,70,15]},"roles":{"count":"bursts","exposure":"km_years"}},"with":{"terms":["material","age"]}})"}});

}  // namespace countsel
