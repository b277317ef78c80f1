// engine/rates/count_fits.cpp -- Poisson and negative-binomial fits, and the four side by side.
#include "engine/rates/count_fits.hpp"

#include <algorithm>
#include <array>
#include <cmath>

#include "engine/numbers/negative_binomial.hpp"
#include "engine/numbers/poisson_deviance.hpp"
#include "engine/numbers/roots.hpp"
#include "engine/rates/count_fits_parts.hpp"
#include "engine/rates/count_fits_sums.hpp"

namespace countsel {
namespace {

// The likelihood as a function of the spread alone, the rate at its best for each spread.
class SpreadProfile {
 public:
  SpreadProfile(const CountRows& rows, double rate, const Work& work)
      : rows_(rows), work_(work), log_rate_(std::log(rate)), same_exposure_(true) {
    for (std::size_t i = 1; i < rows.size(); ++i)
      same_exposure_ = same_exposure_ && rows.exposure(i) == rows.exposure(0);
  }

  bool same_exposure() const { return same_exposure_; }
  double rate() const { return std::exp(log_rate_); }

  double slope(double spread) {
    settle(spread);
    const double rate = this->rate();
    return sums_over<1>(rows_.size(), work_, [&](std::size_t i) {
      return std::array{rows_.seen(i) *
                        negative_binomial_spread_slope(rows_.counts[i], spread, rate * rows_.exposure(i))};
    })[0];
  }

  double loglik(double spread) {
    settle(spread);
    const double rate = this->rate();
    return sums_over<1>(rows_.size(), work_, [&](std::size_t i) {
      return std::array{rows_.seen(i) *
                        negative_binomial_log_exactly(rows_.counts[i], 1 / spread, rate * rows_.exposure(i))};
    })[0];
  }

 private:
  // The score in the log rate falls steadily, so Newton's steps, kept short, end at its only root; with
  // equal exposures the mean stays best whatever the spread.
  void settle(double spread) {
    if (same_exposure_) return;
    for (int step = 0; step < 100; ++step) {
      const double rate = this->rate();
      const auto [score, curve] = sums_over<2>(rows_.size(), work_, [&](std::size_t i) {
        const double mean = rate * rows_.exposure(i), damp = 1 / (1 + spread * mean);
        return std::array{rows_.seen(i) * (rows_.counts[i] - mean) * damp,
                          rows_.seen(i) * mean * (1 + spread * rows_.counts[i]) * damp * damp};
      });
      const double change = std::clamp(score / curve, -1.0, 1.0);
      log_rate_ += change;
      if (std::abs(change) < 1e-14) break;
    }
  }

  const CountRows& rows_;
  const Work& work_;
  double log_rate_;
  bool same_exposure_;
};

// Where the slope turns from rising to falling, searched from `guess`; 0 where it never rises.
double best_spread(SpreadProfile& profile, double guess) {
  double high = guess, low = guess;
  if (profile.slope(guess) > 0) {
    while (high < 1e12 && profile.slope(high *= 4) > 0) low = high;
  } else {
    while (low > 1e-15 && profile.slope(low /= 4) <= 0) high = low;
    if (low <= 1e-15) return 0;
  }
  return std::exp(bracketed_root([&](double log_spread) { return profile.slope(std::exp(log_spread)); },
                                 std::log(low), std::log(high)));
}

}  // namespace

CountFit finished_fit(CountFit fit, const CountTotals& totals) {
  switch (fit.distribution) {
    case CountDistribution::poisson:
      fit.parameters = 1;
      break;
    case CountDistribution::negative_binomial:
    case CountDistribution::zero_inflated_poisson:
      fit.parameters = 2;
      break;
    case CountDistribution::zero_inflated_negative_binomial:
      fit.parameters = 3;
  }
  const double k = static_cast<double>(fit.parameters);
  fit.aic = 2 * k - 2 * fit.loglik;
  fit.bic = k * std::log(totals.rows) - 2 * fit.loglik;
  return fit;
}

CountFit fit_poisson_counts(const CountRows& rows, const CountTotals& totals, const Work& work) {
  CountFit fit;
  fit.rate = totals.events / totals.exposure;
  fit.loglik = sums_over<1>(rows.size(), work, [&](std::size_t i) {
    return std::array{rows.seen(i) * log_poisson(rows.counts[i], fit.rate * rows.exposure(i))};
  })[0];
  return finished_fit(fit, totals);
}

CountFit fit_negative_binomial_counts(const CountRows& rows, const CountTotals& totals, const Work& work) {
  CountFit fit = fit_poisson_counts(rows, totals, work);
  fit.distribution = CountDistribution::negative_binomial;
  fit.at_edge = true;
  SpreadProfile profile(rows, fit.rate, work);
  const auto [excess, squares] = sums_over<2>(rows.size(), work, [&](std::size_t i) {
    const double mean = fit.rate * rows.exposure(i), off = rows.counts[i] - mean;
    return std::array{rows.seen(i) * (off * off - rows.counts[i]), rows.seen(i) * mean * mean};
  });
  // With equal exposures no excess over the mean means no spread (Levin and Reeds 1977); with unequal ones a
  // spread may still gain, so it is looked for on both sides of 1 over the mean.
  double spread = 0;
  if (excess > 0) {
    spread = best_spread(profile, excess / squares);
  } else if (!profile.same_exposure()) {
    const double unit = totals.rows / totals.events;
    for (const double times : {0.01, 0.1, 1.0, 10.0, 100.0})
      if (profile.slope(times * unit) > 0) spread = best_spread(profile, times * unit);
  }
  if (spread > 0) {
    const double loglik = profile.loglik(spread);
    if (loglik > fit.loglik) {
      fit.spread = spread;
      fit.rate = profile.rate();
      fit.loglik = loglik;
      fit.at_edge = false;
    }
  }
  return finished_fit(fit, totals);
}

std::vector<CountFit> fit_count_distributions(const CountRows& rows, const Work& work) {
  require_count_rows(rows);
  const CountPatterns patterns = condense_count_rows(rows);
  const CountRows condensed = patterns.rows();
  const CountTotals totals = count_totals(condensed);
  using enum CountDistribution;
  std::vector<CountFit> fits;
  if (totals.events == 0) {
    for (const CountDistribution distribution :
         {poisson, negative_binomial, zero_inflated_poisson, zero_inflated_negative_binomial}) {
      CountFit fit;
      fit.distribution = distribution;
      fit.at_edge = distribution != poisson;
      fits.push_back(finished_fit(fit, totals));
    }
    return fits;
  }
  fits.push_back(fit_poisson_counts(condensed, totals, work));
  fits.push_back(fit_negative_binomial_counts(condensed, totals, work));
  fits.push_back(fit_zero_inflated(condensed, totals, fits[0], nullptr, work));
  fits.push_back(fit_zero_inflated(condensed, totals, fits[1], &fits[2], work));
  return fits;
}

CountFit fit_count_distribution(const CountRows& rows, CountDistribution distribution, const Work& work) {
  if (distribution == CountDistribution::poisson || distribution == CountDistribution::negative_binomial) {
    require_count_rows(rows);
    const CountPatterns patterns = condense_count_rows(rows);
    const CountRows condensed = patterns.rows();
    const CountTotals totals = count_totals(condensed);
    if (totals.events > 0)
      return distribution == CountDistribution::poisson
                 ? fit_poisson_counts(condensed, totals, work)
                 : fit_negative_binomial_counts(condensed, totals, work);
  }
  return fit_count_distributions(rows, work)[static_cast<std::size_t>(distribution)];
}

}  // namespace countsel
