// engine/rates/limits.cpp -- ten ways to put limits round a Poisson count.
#include "engine/rates/limits.hpp"

#include <algorithm>
#include <cmath>
#include <limits>

#include "engine/numbers/distributions.hpp"
#include "engine/numbers/large_shapes.hpp"
#include "engine/numbers/roots.hpp"
#include "engine/rates/checks.hpp"
#include "engine/refusal.hpp"

namespace countsel {
namespace {

constexpr double infinity = std::numeric_limits<double>::infinity();
constexpr double nan = std::numeric_limits<double>::quiet_NaN();

double gamma_end(double shape, End end, double tail) {
  return end == End::low ? gamma_quantile(shape, tail) : gamma_upper_quantile(shape, tail);
}

// Garwood 1936: P(X >= count) = tail below, P(X <= count) = tail above. A record that stops at its last
// event makes 2 mean chi-square on 2 count degrees of freedom, at both ends (Epstein and Sobel 1953).
double exact_end(double count, End end, double tail, StoppedBy stopped_by) {
  if (stopped_by == StoppedBy::event) return count == 0 ? nan : gamma_end(count, end, tail);
  if (end == End::high) return gamma_upper_quantile(count + 1, tail);
  return count == 0 ? 0 : gamma_quantile(count, tail);
}

// The mean at which the chance beyond the count and half the chance of the count make `tail`; its derivative
// is the mean of the chances of count - 1 and count.
double mid_p_end(double count, End end, double tail) {
  const bool low = end == End::low;
  if (count == 0)  // the half chance is exp(-mean) / 2
    return std::max(0.0, -std::log(low ? 2 * (1 - tail) : 2 * tail));
  const auto gap = [&](double mean) {
    const double exactly = gamma_front(count, mean) / count;
    const double beyond = low ? gamma_below(count + 1, mean) : gamma_above(count, mean);
    const double here = beyond + exactly / 2;
    if (!(here > 0)) return ValueSlope{-infinity, low ? 1.0 : -1.0};
    const double slope = exactly * (mean + count) / 2 / here;
    return ValueSlope{std::log(here / tail), low ? slope : -slope};
  };
  const double z = low ? normal_quantile(tail) : normal_upper_quantile(tail), shape = count + 0.5;
  const double root = 1 - 1 / (9 * shape) + z / (3 * std::sqrt(shape));
  const double guess = root > 0.2 ? shape * root * root * root : shape * std::exp((z - 1) / std::sqrt(shape));
  return log_newton_root(gap, guess, 1 + std::sqrt(count));
}

// u > -1 on the side of `sign` with u - log(1 + u) = gap: the relative excess of a mean over the count whose
// log likelihood is lower by count * gap. Returns 1 + u.
double likelihood_factor(double gap, double sign) {
  const double s = std::sqrt(2 * gap);
  if (sign < 0 && s > 0.3) {  // 1 + u may be small: solve for its logarithm
    double w = s < 2 ? -s - s * s / 6 : -1 - gap;
    for (int step = 0; step < 50; ++step) {
      const double change = (std::expm1(w) - w - gap) / std::expm1(w);
      w -= change;
      if (std::abs(change) <= 1e-16 * std::abs(w)) break;
    }
    return std::exp(w);
  }
  double u = s < 1 ? sign * s + s * s / 3 + sign * s * s * s / 36 : gap + std::log1p(gap + s);
  for (int step = 0; step < 50; ++step) {
    const double change = (log1p_gap(u) - gap) * (1 + u) / u;
    u -= change;
    if (std::abs(change) <= 1e-15 * std::abs(u)) break;
  }
  return 1 + u;
}

// The closed forms below take z as the deviate that the mean lies above the count: below it where z < 0. One
// confidence of a half turns a lower limit into an upper one, and the signs still hold.

double likelihood_end(double count, double z) {
  if (count == 0) return z > 0 ? z * z / 2 : 0;
  return z == 0 ? count : count * likelihood_factor(z * z / 2 / count, std::copysign(1.0, z));
}

// mean with (count - mean)^2 = z^2 mean; the smaller root is count^2 over the larger.
double score_end(double count, double z) {
  const double larger = count + z * z / 2 + std::abs(z) * std::sqrt(count + z * z / 4);
  if (z >= 0) return larger;
  return count == 0 ? 0 : count / larger * count;
}

double byar_end(double count, End end, double z) {
  const double shape = end == End::low ? count : count + 1;
  if (shape == 0) return 0;
  const double root = 1 - 1 / (9 * shape) + z / (3 * std::sqrt(shape));
  return root > 0 ? shape * root * root * root : 0;
}

double square_root_end(double count, double z) {
  const double root = std::max(0.0, std::sqrt(count + 0.375) + z / 2);
  return std::max(0.0, root * root - 0.375);
}

Limits placed(Side side, double low, double high) {
  return {side == Side::upper ? 0 : low, side == Side::lower ? infinity : high};
}

}  // namespace

double tail_of(double confidence, Side side) {
  return side == Side::both ? (1 - confidence) / 2 : 1 - confidence;
}

void require_limits(const LimitsSpec& spec) {
  require_probability(spec.confidence, "confidence");
  const GammaPrior& prior = spec.prior;
  if (spec.method == RateMethod::bayes &&
      !(prior.shape >= 0 && std::isfinite(prior.shape) && prior.rate >= 0 && std::isfinite(prior.rate)))
    throw Refusal(Code::bad_value, "A prior's shape and rate are 0 or more.", {{"prior", 0}});
}

double mean_limit(double count, End end, double tail, const LimitsSpec& spec) {
  const double z = end == End::low ? normal_quantile(tail) : normal_upper_quantile(tail);
  switch (spec.method) {
    case RateMethod::exact:
      return exact_end(count, end, tail, spec.stopped_by);
    case RateMethod::mid_p:
      return mid_p_end(count, end, tail);
    case RateMethod::score:
      return score_end(count, z);
    case RateMethod::likelihood:
      return likelihood_end(count, z);
    case RateMethod::jeffreys:
      return end == End::low && count == 0 ? 0 : gamma_end(count + 0.5, end, tail);
    case RateMethod::byar:
      return byar_end(count, end, z);
    case RateMethod::wald:
      return std::max(0.0, count + z * std::sqrt(count));
    case RateMethod::log_wald:
      return count == 0 ? nan : count * std::exp(z / std::sqrt(count));
    case RateMethod::square_root:
      return square_root_end(count, z);
    case RateMethod::bayes:
      return count + spec.prior.shape > 0 ? gamma_end(count + spec.prior.shape, end, tail) : nan;
  }
  return nan;
}

Limits rate_limits(double count, double exposure, const LimitsSpec& spec) {
  require_count(count);
  require_exposure(exposure);
  require_limits(spec);
  const double tail = tail_of(spec.confidence, spec.side);
  const double divisor = spec.method == RateMethod::bayes ? exposure + spec.prior.rate : exposure;
  return placed(spec.side, spec.side == Side::upper ? 0 : mean_limit(count, End::low, tail, spec) / divisor,
                spec.side == Side::lower ? 0 : mean_limit(count, End::high, tail, spec) / divisor);
}

Limits scaled_rate_limits(double count, double exposure, double dispersion, double df, double confidence,
                          Side side) {
  require_count(count);
  require_exposure(exposure);
  require_probability(confidence, "confidence");
  if (count == 0 || !(df > 0) || !(dispersion > 0)) return placed(side, nan, nan);
  const double spread = student_upper_quantile(tail_of(confidence, side), df) * std::sqrt(dispersion / count);
  return placed(side, count * std::exp(-spread) / exposure, count * std::exp(spread) / exposure);
}

}  // namespace countsel
