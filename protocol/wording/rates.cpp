// protocol/wording/rates.cpp -- what is said of rates, never stronger than the figures.
#include "protocol/wording/rates.hpp"

#include <algorithm>
#include <cmath>

#include "protocol/wording/numbers.hpp"

namespace countsel {

std::vector<std::string> labels_of(const Role& label, const Asked& asked) {
  std::vector<std::string> labels;
  labels.reserve(asked.rows);
  for (std::size_t i = 0; i < asked.rows; ++i) {
    if (label.given) {
      labels.push_back(label.levels[static_cast<std::size_t>(label.codes[i])]);
    } else {
      labels.push_back(std::to_string(asked.row_number(i)));
    }
  }
  return labels;
}

std::string method_words(RateMethod method, bool scaled) {
  if (scaled) return "scaled";
  switch (method) {
    case RateMethod::exact:
      return "exact";
    case RateMethod::mid_p:
      return "mid-p";
    case RateMethod::score:
      return "score";
    case RateMethod::likelihood:
      return "likelihood";
    case RateMethod::jeffreys:
      return "Jeffreys";
    case RateMethod::byar:
      return "Byar";
    case RateMethod::wald:
      return "Wald";
    case RateMethod::log_wald:
      return "log-Wald";
    case RateMethod::square_root:
      return "square-root";
    default:
      return "Bayesian";
  }
}

std::string say_rate(const Wording& wording, const SaidRate& said, const std::string& method, Side side,
                     bool exposure_given) {
  std::string text = capital(wording.counted(said.count)) + " in " + wording.observed(said.exposure) +
                     wording.period() + ": ";
  const bool no_limits = std::isnan(said.low) || std::isnan(said.high);
  const auto rounded = round_limits(said.rate, said.low, said.high);
  const std::string level =
      " (" + wording.level() + (side == Side::both ? " limits, " : " one-sided limit, ") + method + ")";
  if (no_limits) {
    text += significant_text(said.rate, 2) + " " + wording.rate_unit() + "; this method has no limits here.";
  } else if (said.count == 0) {
    text += "the rate is " + wording.limits(said.rate, said.low, said.high) + " " + wording.rate_unit() +
            level + ". None seen is not none possible.";
  } else {
    text += rounded.value + " " + wording.rate_unit() + ", " +
            wording.limits(said.rate, said.low, said.high) + level + ".";
  }
  if (!exposure_given) text += " No exposure was given, so each row counts as 1.";
  return text;
}

std::string say_extremes(const Wording& wording, const std::vector<std::string>& labels,
                         const std::vector<double>& rates, const std::vector<double>& lows,
                         const std::vector<double>& highs) {
  std::size_t top = 0, bottom = 0;
  for (std::size_t i = 1; i < rates.size(); ++i) {
    if (rates[i] > rates[top]) top = i;
    if (rates[i] < rates[bottom]) bottom = i;
  }
  if (rates[top] == rates[bottom]) return "All " + std::to_string(rates.size()) + " rates are the same.";
  const auto one = [&](std::size_t i) {
    const auto rounded = round_limits(rates[i], lows[i], highs[i]);
    if (std::isnan(lows[i]) || std::isnan(highs[i])) return labels[i] + " at " + rounded.value;
    return labels[i] + " at " + rounded.value + ", " + wording.limits(rates[i], lows[i], highs[i]);
  };
  return "Highest is " + one(top) + "; lowest is " + one(bottom) + ".";
}

Note no_exposure_note(std::size_t rows) {
  return {"no_exposure",
          "No exposure was given; " +
              (rows == 1 ? std::string("the row") : "each of the " + std::to_string(rows) + " rows") +
              " counts as 1 unit."};
}

Note scaled_note(const Dispersion& spread, double phi) {
  std::string text = "The limits allow for counts that vary " + significant_text(phi, 3) +
                     " times as much as a Poisson's (Pearson's statistic over its " + given_text(spread.df) +
                     " degrees of freedom";
  text += spread.phi < 1 ? ", " + significant_text(spread.phi, 3) + ", taken as 1)." : ").";
  return {"dispersion", std::move(text)};
}

void note_dispersion(const Dispersion& spread, bool groups, const Wording& wording, std::vector<Note>& notes,
                     const std::string& remedy) {
  if (!(spread.df > 0) || std::isnan(spread.phi)) return;
  const double p = dispersion_p(spread);
  if (p >= 0.01 || spread.phi <= 1) return;
  notes.push_back({"over_dispersed",
                   "Rows " + std::string(groups ? "within groups " : "") + "vary " +
                       significant_text(spread.phi, 2) +
                       " times as much as Poisson counts would (chance of so much: " + p_text(p) + "). " +
                       (groups ? "These limits are then too narrow; "
                               : "The common rate's limits are then too narrow; ") +
                       remedy + " Perhaps " + wording.events() +
                       " come in clusters, or the rows differ in ways not looked at."});
}

void note_small_count(double count, const Wording& wording, std::vector<Note>& notes) {
  if (count >= 10) return;
  const std::string how = count > 0 ? "Only " + wording.counted(count) +
                                          ": one more or less would change the rate by " +
                                          significant_text(100 / count, 2) + "%."
                                    : "There were " + wording.counted(0) +
                                          " at all: a rate of 0 is what was "
                                          "seen, not what is possible.";
  notes.push_back({"small_count", how + " Read the limits rather than the rate."});
}

void note_large_sum(double count, std::vector<Note>& notes) {
  if (count <= 9007199254740992.0) return;
  notes.push_back({"large_sum", "The counts add up to more than 2^53; the sum is rounded to a double."});
}

void note_no_limits(const std::vector<std::string>& labels, const std::vector<double>& lows,
                    const std::vector<double>& highs, RateMethod method, bool scaled,
                    std::vector<Note>& notes) {
  std::vector<std::string> without;
  for (std::size_t i = 0; i < lows.size(); ++i) {
    if (std::isnan(lows[i]) || std::isnan(highs[i])) without.push_back(labels[i]);
  }
  if (without.empty()) return;
  notes.push_back({"no_limits", capital(method_words(method, scaled)) + " limits have no value for " +
                                    listed(without, 5) + "; \"limits\":\"exact\" or \"mid-p\" has."});
}

}  // namespace countsel
