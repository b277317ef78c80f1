// engine/rates/count_fits_zeros.cpp -- fits with a share of rows that can only be zero.
//
// Climbed in log rate, log odds of the share and, where free, log spread, from the plain fit with a few zeros
// added and, for the negative binomial, also from the zero-inflated Poisson with a little spread. What ends
// at the likelihood of a smaller model is given as that smaller model, at its edge.
#include <algorithm>
#include <array>
#include <cmath>

#include "engine/numbers/negative_binomial.hpp"
#include "engine/rates/count_fits_parts.hpp"
#include "engine/rates/count_fits_sums.hpp"

namespace countsel {
namespace {

constexpr double log_edge = -16;  // a share or spread of 1e-7 is none
constexpr std::size_t many_rows = 2000;

// Value and slopes at (log rate, log odds of the share, log spread); without a third unknown, Poisson.
ValueGradient inflated_loglik(const CountRows& rows, const std::vector<double>& at, const Work& work) {
  const bool free_spread = at.size() == 3;
  const double rate = std::exp(at[0]), spread = free_spread ? std::exp(at[2]) : 0;
  const double share = 1 / (1 + std::exp(-at[1])), rest = 1 / (1 + std::exp(at[1]));
  const auto sums = sums_over<4>(rows.size(), work, [&](std::size_t i) {
    const double y = rows.counts[i], mean = rate * rows.exposure(i), times = rows.seen(i);
    const double log_chance = negative_binomial_log_exactly(y, 1 / spread, mean);
    const double by_rate = (y - mean) / (1 + spread * mean);
    const double by_spread = free_spread ? spread * negative_binomial_spread_slope(y, spread, mean) : 0;
    if (y > 0)
      return std::array{times * (log_chance + std::log(rest)), times * by_rate, -times * share,
                        times * by_spread};
    const double zero = std::exp(log_chance), both = share + rest * zero;
    const double plain = rest * zero / both;  // chance that a zero is not an added one
    return std::array{times * std::log(both), times * plain * by_rate,
                      times * share * rest * -std::expm1(log_chance) / both, times * plain * by_spread};
  });
  ValueGradient result{sums[0], {sums[1], sums[2]}};
  if (free_spread) result.gradient.push_back(sums[3]);
  return result;
}

// The score for adding zeros to the plain fit: at most 0 means that the first added zero already costs.
double score_for_zeros(const CountRows& rows, const CountFit& plain, const Work& work) {
  return sums_over<1>(rows.size(), work, [&](std::size_t i) {
    const double mean = plain.rate * rows.exposure(i);
    const double log_zero = negative_binomial_log_exactly(0, 1 / plain.spread, mean);
    return std::array{rows.seen(i) * (rows.counts[i] == 0 ? std::expm1(-log_zero) : -1.0)};
  })[0];
}

double log_odds(double share) { return std::log(share / (1 - share)); }

}  // namespace

CountFit fit_zero_inflated(const CountRows& rows, const CountTotals& totals, const CountFit& plain,
                           const CountFit* inflated, const Work& work) {
  CountFit fit = plain;
  fit.distribution = inflated ? CountDistribution::zero_inflated_negative_binomial
                              : CountDistribution::zero_inflated_poisson;
  fit.at_edge = true;
  if (inflated && inflated->loglik > fit.loglik) {
    fit.rate = inflated->rate;
    fit.spread = inflated->spread;
    fit.extra_zeros = inflated->extra_zeros;
    fit.loglik = inflated->loglik;
  }
  const bool zeros_gain = totals.zeros > 0 && score_for_zeros(rows, plain, work) > 0;
  std::vector<std::vector<double>> starts;
  if (zeros_gain) {
    for (const double share : {0.3, 0.9}) {
      const double some = share * totals.zeros / totals.rows;
      std::vector<double> start{std::log(plain.rate / (1 - some)), log_odds(some)};
      if (inflated) start.push_back(std::log(std::max(plain.spread / 2, 0.01)));
      starts.push_back(start);
    }
  }
  if (inflated && inflated->extra_zeros > 0)
    starts.push_back({std::log(inflated->rate), log_odds(inflated->extra_zeros), std::log(0.05)});
  for (const auto& start : starts) {
    const Maximum top = climb([&](const std::vector<double>& at) { return inflated_loglik(rows, at, work); },
                              start, 1e-9 * std::sqrt(totals.rows), log_edge);
    // A gain that rounding could make is no gain: the climb has crept towards the edge.
    if (!(top.value > fit.loglik + 1e-9 * (1 + std::abs(fit.loglik)))) continue;
    fit.rate = std::exp(top.at[0]);
    fit.extra_zeros = 1 / (1 + std::exp(-top.at[1]));
    if (inflated) fit.spread = std::exp(top.at[2]);
    fit.loglik = top.value;
    fit.converged = top.converged;
    fit.at_edge = false;
    if (rows.size() > many_rows) break;  // other starts rarely find more, and each costs as much again
  }
  return finished_fit(fit, totals);
}

}  // namespace countsel
