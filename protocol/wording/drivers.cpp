// protocol/wording/drivers.cpp -- sentences and notes about a fitted rate model.
#include "protocol/wording/drivers.hpp"

#include <algorithm>
#include <cmath>

#include "engine/numbers/distributions.hpp"
#include "protocol/wording/numbers.hpp"

namespace countsel {
namespace {

/// The ratio of a term that lies farthest from 1 on the log scale among those with limits.
const SaidRatio* most_telling(const std::vector<SaidRatio>& ratios, const std::string& term) {
  const SaidRatio* best = nullptr;
  for (const auto& ratio : ratios) {
    if (ratio.term != term || ratio.reference || !(ratio.ratio > 0) || !std::isfinite(ratio.ratio)) continue;
    if (!best || std::abs(std::log(ratio.ratio)) > std::abs(std::log(best->ratio))) best = &ratio;
  }
  return best;
}

const SaidRatio* reference_of(const std::vector<SaidRatio>& ratios, const std::string& term) {
  for (const auto& ratio : ratios) {
    if (ratio.term == term && ratio.reference) return &ratio;
  }
  return nullptr;
}

}  // namespace

std::string say_drivers(const Wording& wording, const Design& design, const std::vector<SaidRatio>& ratios,
                        const std::vector<TermTest>& tests, double level, double rows) {
  const std::string limits = " (" + wording.level() + " limits)";
  if (tests.empty()) {
    const auto& base = ratios.front();
    return "Without any terms the rate is " + round_limits(base.ratio, base.low, base.high).value + " " +
           wording.rate_unit() + ", " + wording.limits(base.ratio, base.low, base.high) + limits + ".";
  }
  const auto& strongest = tests.front();
  const std::string& name = design.terms[strongest.term].name;
  if (!(strongest.p_value < level)) {
    return "None of the " + std::to_string(tests.size()) + (tests.size() == 1 ? " term" : " terms") +
           " looked at is clearly related to " + wording.rate_unit() + " in these " + given_text(rows) +
           " rows; " + name + " comes closest (p " + (strongest.p_value > 0.99 ? "" : "= ") +
           p_text(strongest.p_value) + ").";
  }
  std::string text = "With the other terms held fixed, " + name + " goes with the largest differences in " +
                     wording.rate_unit();
  if (const auto* telling = most_telling(ratios, name)) {
    const auto rounded = round_limits(telling->ratio, telling->low, telling->high);
    if (telling->level) {
      const auto* reference = reference_of(ratios, name);
      text += ": " + *telling->level + " has " + rounded.value + " times the rate of " +
              (reference && reference->level ? *reference->level : std::string("the reference")) + ", " +
              wording.limits(telling->ratio, telling->low, telling->high) + limits;
    } else {
      text += ": each step of 1 in " + name + " goes with " + rounded.value + " times the rate, " +
              wording.limits(telling->ratio, telling->low, telling->high) + limits;
    }
  }
  text += ". It goes together with the rate; that it causes it is not shown.";
  return text;
}

void note_fit(const Wording& wording, const Design& design, const GlmFit& fit, bool scaled, bool robust,
              std::vector<Note>& notes) {
  std::vector<std::string> chosen, infinite_low, infinite_high, undetermined;
  for (const auto& term : design.terms) {
    for (const auto factor : term.factors) {
      const auto& column = design.columns[factor];
      if (column.reference || design.references[factor] < 0 || term.factors.size() > 1) continue;
      chosen.push_back(column.name + " with " +
                       (*column.levels)[static_cast<std::size_t>(design.references[factor])]);
    }
  }
  if (!chosen.empty()) {
    notes.push_back(
        {"reference", "Compared with the level that has most exposure: " + listed(chosen, 12) + "."});
  }
  for (std::size_t i = 0; i < fit.status.size(); ++i) {
    const auto name = design.coefficient_name(i);
    if (fit.status[i] == CoefficientStatus::minus_infinity) infinite_low.push_back(name);
    if (fit.status[i] == CoefficientStatus::plus_infinity) infinite_high.push_back(name);
    if (fit.status[i] == CoefficientStatus::undetermined) undetermined.push_back(name);
  }
  for (const auto& alias : fit.aliases) {
    std::vector<std::string> parts;
    for (const auto& [coefficient, multiple] : alias.combination)
      parts.push_back(design.coefficient_name(coefficient));
    notes.push_back({"aliased", design.coefficient_name(alias.coefficient) +
                                    " says nothing of its own: it is a combination of " +
                                    (parts.empty() ? "nothing else, being constant at 0" : listed(parts, 8)) +
                                    ". It is left out."});
  }
  if (!infinite_low.empty() || !infinite_high.empty()) {
    std::string text;
    if (!infinite_low.empty()) {
      text += "Nothing happened where " + listed(infinite_low, 8) +
              " would be seen, so the estimated rate goes to 0 there. ";
    }
    if (!infinite_high.empty()) text += "The estimate of " + listed(infinite_high, 8) + " goes to infinity. ";
    text += std::to_string(fit.separated_rows.size()) +
            (fit.separated_rows.size() == 1 ? " row is" : " rows are") +
            " set apart by this; the rest of the fit stands without " +
            (fit.separated_rows.size() == 1 ? "it." : "them.");
    notes.push_back({"infinite", std::move(text)});
  }
  if (!undetermined.empty()) {
    notes.push_back(
        {"undetermined", "The rows that are left say nothing about " + listed(undetermined, 8) + "."});
  }
  if (!fit.converged) {
    notes.push_back({"not_converged", "The fit did not settle after " + std::to_string(fit.iterations) +
                                          " passes; " + design.coefficient_name(fit.worst) +
                                          " was still moving, by " + significant_text(fit.last_step, 2) +
                                          " standard errors."});
  }
  if (fit.condition >= 1e12) {
    notes.push_back({"nearly_aliased", "Some columns are almost combinations of others (condition " +
                                           significant_text(fit.condition, 2) +
                                           "); single ratios are then badly determined."});
  }
  if (fit.df > 0 && std::isfinite(fit.dispersion)) {
    const double above = chi_square_above(fit.pearson, fit.df), below = chi_square_below(fit.pearson, fit.df);
    if (above < 0.01 && fit.dispersion > 1) {
      std::string text = "Counts vary " + significant_text(fit.dispersion, 3) +
                         " times as much as Poisson counts would with these terms";
      text +=
          scaled ? "; the errors allow for it."
          : robust
              ? "; the robust errors allow for it."
              : R"(: the limits are too narrow. "errors":"scaled" or "robust" allows for it; perhaps a term is missing, or )" +
                    wording.events() + " come in clusters.";
      notes.push_back({"over_dispersed", std::move(text)});
    } else if (below < 0.01 && fit.dispersion < 1) {
      notes.push_back({"under_dispersed", "Counts vary only " + significant_text(fit.dispersion, 3) +
                                              " times as much as Poisson counts would: the limits are wider "
                                              "than need be, or the counts are not free to vary."});
    }
  }
}

}  // namespace countsel
