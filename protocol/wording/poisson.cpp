// protocol/wording/poisson.cpp -- trusted, too wide, too even, or too little to tell.
#include "protocol/wording/poisson.hpp"

#include <algorithm>
#include <cmath>

#include "protocol/wording/numbers.hpp"

namespace countsel {
namespace {

std::string p_words(double p) { return "p " + std::string(p < 0.0001 || p > 0.99 ? "" : "= ") + p_text(p); }

bool zeros_in_excess(const SaidPoisson& said) { return said.zeros.p_either < said.level && said.zeros.z > 0; }

std::string too_varied(const Wording& wording, const SaidPoisson& said) {
  const CountFit& best = best_fit(said.fits);
  std::string text = " Poisson limits and tests would promise too much: ask with \"spread\":\"scaled\"";
  if (best.distribution != CountDistribution::poisson)
    text += ", or fit a " + distribution_words(best.distribution) + " model, which fits best here";
  text += ", and look for what makes " + wording.events() + " cluster or rows differ.";
  if (zeros_in_excess(said)) {
    text += " There are also more rows without " + wording.events() + " than Poisson counts would show (" +
            given_text(said.zeros.zeros) + " against " + significant_text(said.zeros.zeros_expected, 3) +
            ").";
  }
  return text;
}

}  // namespace

std::string distribution_name(CountDistribution distribution) {
  switch (distribution) {
    case CountDistribution::negative_binomial:
      return "negative-binomial";
    case CountDistribution::zero_inflated_poisson:
      return "zero-inflated-poisson";
    case CountDistribution::zero_inflated_negative_binomial:
      return "zero-inflated-negative-binomial";
    default:
      return "poisson";
  }
}

std::string distribution_words(CountDistribution distribution) {
  switch (distribution) {
    case CountDistribution::negative_binomial:
      return "negative-binomial";
    case CountDistribution::zero_inflated_poisson:
      return "zero-inflated Poisson";
    case CountDistribution::zero_inflated_negative_binomial:
      return "zero-inflated negative-binomial";
    default:
      return "Poisson";
  }
}

const CountFit& best_fit(const std::vector<CountFit>& fits) {
  const CountFit* best = &fits.front();
  for (const auto& fit : fits) {
    if (fit.converged && !fit.at_edge && fit.aic < best->aic) best = &fit;
  }
  return *best;
}

std::string say_poisson(const Wording& wording, const SaidPoisson& said) {
  std::string text =
      capital(wording.counted(said.events)) + " in " + given_text(said.rows) + " rows" + wording.period();
  if (said.events == 0) return text + ": nothing happened, so nothing can be said of how counts vary.";
  const double phi = said.test.dispersion;
  const std::string tested = " (dispersion " + significant_text(phi, 3) + ", " + p_words(said.p_value) +
                             (said.direction == Direction::either ? "" : ", one-sided") + ").";
  const std::string as_much =
      said.exposure ? " as Poisson counts at these exposures would" : " as Poisson counts would";
  if (said.p_value < said.level) {
    if (phi > 1) {
      return text + ": they vary " + significant_text(phi, 2) + " times as much" + as_much + tested +
             too_varied(wording, said);
    }
    return text +
           (phi == 0 ? ": they do not vary at all, as Poisson counts would"
                     : ": they vary only " + significant_text(phi, 2) + " times as much" + as_much) +
           tested +
           " Such evenness is unusual: look for counts that are capped, smoothed, shared out or repeated. "
           "Poisson limits are on the safe side here.";
  }
  text += ": they vary about as much" + as_much + tested;
  if (zeros_in_excess(said)) {
    return text + " Yet more rows have no " + wording.events() + " than Poisson counts would show (" +
           given_text(said.zeros.zeros) + " against " + significant_text(said.zeros.zeros_expected, 3) +
           ", " + p_words(said.zeros.p_either) + "): ask whether all rows could have had any.";
  }
  if (said.could_show >= 1.5) {
    return text + " That is no proof: with so little to go by, only counts that vary about " +
           significant_text(said.could_show, 2) + " times as much would probably have shown.";
  }
  return text + " Poisson limits and tests may be used.";
}

void note_poisson(const SaidPoisson& said, double smallest_expected, double fit_df,
                  std::vector<Note>& notes) {
  if (said.events == 0) return;
  if (smallest_expected < 1) {
    notes.push_back(
        {"approximate",
         "Some rows expect fewer than 1 (" + significant_text(smallest_expected, 2) +
             "), where the chi-square distribution is a rough guide to the dispersion's p-value."});
  }
  if (said.zeros.zeros_expected < 5) {
    notes.push_back({"few_zeros_expected", "Fewer than 5 rows without events are expected (" +
                                               significant_text(said.zeros.zeros_expected, 2) +
                                               "); the test for too many zeros is rough."});
  }
  if (std::isnan(fit_df)) {
    notes.push_back({"no_fit_test",
                     "The counts take too few different values for a test of fit: fewer than "
                     "three classes are left once thin ones are pooled."});
  }
  std::vector<std::string> edges, failed;
  for (const auto& fit : said.fits) {
    if (!fit.converged) failed.push_back(distribution_words(fit.distribution));
    if (fit.at_edge) edges.push_back(distribution_words(fit.distribution));
  }
  if (!edges.empty()) {
    notes.push_back({"at_edge", "Nothing was gained over a smaller model by: " + listed(edges) +
                                    ". Their spread or share of added zeros is 0."});
  }
  if (!failed.empty())
    notes.push_back({"not_converged", "No maximum was reached for: " + listed(failed) + "."});
  notes.push_back(
      {"best_fit", "By Akaike's criterion the " + distribution_words(best_fit(said.fits).distribution) +
                       " distribution fits best. Extra zeros and a wandering rate look much alike in "
                       "such a table; what is known of the rows decides between them."});
}

}  // namespace countsel
