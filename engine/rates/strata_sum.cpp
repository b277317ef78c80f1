// engine/rates/strata_sum.cpp -- tilting and Fourier inversion for a sum of binomials.
#include "engine/rates/strata_sum.hpp"

#include <algorithm>
#include <cmath>
#include <complex>
#include <limits>

#include "engine/numbers/roots.hpp"
#include "engine/numbers/sums.hpp"

namespace countsel {
namespace {

using Complex = std::complex<double>;
constexpr double two_pi = 6.283185307179586477;

// The cumulant series from the second term to the sixth, for |z| <= 0.003.
template <typename Number>
Number cumulant_series(double p, double q, Number z) {
  const double v = p * q, skew = q - p;
  const double k4 = v * (1 - 6 * v), k5 = v * skew * (1 - 12 * v), k6 = v * (1 - 30 * v * (1 - 4 * v));
  return z * z * (v / 2 + z * (v * skew / 6 + z * (k4 / 24 + z * (k5 / 120 + z * (k6 / 720)))));
}

// K(p, i t) for 0 <= t <= pi. K(p, d) = K(q, -d) lets the smaller chance speak: with p near 1 the large
// terms would cancel.
Complex centred_cumulant_on_circle(double p, double q, double t) {
  if (p > q) return std::conj(centred_cumulant_on_circle(q, p, t));
  if (t < 0.003) return cumulant_series(p, q, Complex(0, t));
  const double half = std::sin(t / 2);
  const double log_size = std::log1p(-4 * p * q * half * half) / 2;
  return {log_size, std::atan2(p * std::sin(t), 1 - 2 * p * half * half) - p * t};
}

Complex characteristic(const StrataSum& sum, double t) {
  Complex total = 0;
  for (const auto& s : sum.strata)
    total += s.events * centred_cumulant_on_circle(s.chance, s.other_chance, t);
  return std::exp(total - Complex(0, t * sum.residual));
}

void find_chances(StrataSum& sum) {
  double variance = 0;
  for (const auto& s : sum.strata) variance += s.events * s.chance * s.other_chance;
  // Bernstein's inequality: less than 1e-20 of the chance lies further out than this.
  const double reach = std::ceil(16 + std::sqrt(240 + 93 * variance));
  sum.first = std::max(0.0, sum.seen - reach);
  const double last = std::min(sum.events, sum.seen + reach);
  const double period = last - sum.first + 1;
  sum.chances.assign(static_cast<std::size_t>(last - sum.first) + 1, 1 / period);
  for (double j = 1; 2 * j <= period; ++j) {
    const double t = two_pi * j / period;
    const Complex value = characteristic(sum, t);
    if (std::abs(value) < 1e-19) break;  // it only falls on the way to pi
    // Both +t and -t, except the single node at pi.
    const double weight = (2 * j == period ? 1 : 2) / period;
    Complex turn = value * std::polar(1.0, -t * (sum.first - sum.seen));
    const Complex step = std::polar(1.0, -t);
    for (std::size_t k = 0; k < sum.chances.size(); ++k) {
      // The turning factor is made afresh now and then, so that its rounding does not add up.
      if (k % 512 == 0) turn = value * std::polar(1.0, -t * (sum.first - sum.seen + static_cast<double>(k)));
      sum.chances[k] += weight * turn.real();
      turn *= step;
    }
  }
  for (double& chance : sum.chances) chance = std::max(chance, 0.0);
}

// Sum of p(k) e^(d (k - seen)) on one side of seen, from the far end inwards; |ratio| <= 1.
double outward_sum(const StrataSum& sum, bool upwards, bool with_seen, double ratio) {
  const auto at = static_cast<std::size_t>(sum.seen - sum.first);
  double total = 0;
  if (upwards)
    for (std::size_t k = sum.chances.size(); k-- > at + 1;) total = ratio * (sum.chances[k] + total);
  else
    for (std::size_t k = 0; k < at; ++k) total = ratio * (sum.chances[k] + total);
  return with_seen ? total + sum.chances[at] : total;
}

}  // namespace

double centred_cumulant(double p, double q, double d) {
  if (std::abs(d) < 0.003) return cumulant_series(p, q, d);
  if (p > q) return centred_cumulant(q, p, -d);
  return d < 700 ? std::log1p(p * std::expm1(d)) - p * d : q * d + std::log(p);
}

StrataSum strata_sum(std::span<const TwoRates> strata, bool with_chances) {
  StrataSum sum;
  double least = std::numeric_limits<double>::infinity(), most = 0;
  for (const auto& s : strata) {
    const double events = s.count1 + s.count0;
    if (!(events > 0 && s.exposure1 > 0 && s.exposure0 > 0)) continue;
    sum.seen += s.count1;
    sum.events += events;
    const double exposure = s.exposure1 + s.exposure0;
    sum.strata.push_back({events, s.exposure1 / exposure, s.exposure0 / exposure});
    least = std::min(least, s.exposure1 / s.exposure0);
    most = std::max(most, s.exposure1 / s.exposure0);
  }
  if (sum.seen == 0 || sum.seen == sum.events) {
    sum.log_ratio = (sum.seen == 0 ? -1 : 1) * std::numeric_limits<double>::infinity();
    return sum;
  }
  const std::vector<TiltedStratum> even = sum.strata;
  const auto tilt = [&](double log_ratio) {
    // Whichever of A and M - A is the smaller is compared with its mean.
    const bool other = sum.seen > sum.events / 2;
    Sum excess;
    excess.add(other ? sum.events - sum.seen : -sum.seen);
    double slope = 0;
    const double ratio = std::exp(log_ratio);
    for (std::size_t i = 0; i < even.size(); ++i) {
      const double up = ratio * even[i].chance, down = even[i].other_chance;
      sum.strata[i].chance = up / (up + down);
      sum.strata[i].other_chance = down / (up + down);
      excess.add(even[i].events * (other ? -sum.strata[i].other_chance : sum.strata[i].chance));
      slope += even[i].events * sum.strata[i].chance * sum.strata[i].other_chance;
    }
    return ValueSlope{excess.value(), slope};
  };
  // With one exposure ratio everywhere the estimate is the odds over it; the true one lies between.
  const double log_odds = std::log(sum.seen / (sum.events - sum.seen));
  const double low = log_odds - std::log(most), high = log_odds - std::log(least);
  sum.log_ratio = newton_root(tilt, (low + high) / 2, low - 1e-9, high + 1e-9);
  sum.residual = -tilt(sum.log_ratio).value;
  if (with_chances) find_chances(sum);
  return sum;
}

double log_likelihood_shift(const StrataSum& sum, double d) {
  Sum shift;
  shift.add(sum.residual * d);
  for (const auto& s : sum.strata) shift.add(-s.events * centred_cumulant(s.chance, s.other_chance, d));
  return std::min(0.0, shift.value());
}

double at_least_seen(const StrataSum& sum, double d) {
  const double scale = std::exp(log_likelihood_shift(sum, d));
  if (d <= 0) return std::min(1.0, scale * outward_sum(sum, true, true, std::exp(d)));
  return std::max(0.0, 1 - scale * outward_sum(sum, false, false, std::exp(-d)));
}

double at_most_seen(const StrataSum& sum, double d) {
  const double scale = std::exp(log_likelihood_shift(sum, d));
  if (d >= 0) return std::min(1.0, scale * outward_sum(sum, false, true, std::exp(-d)));
  return std::max(0.0, 1 - scale * outward_sum(sum, true, false, std::exp(d)));
}

double exactly_seen(const StrataSum& sum, double d) {
  return std::exp(log_likelihood_shift(sum, d)) * sum.chances[static_cast<std::size_t>(sum.seen - sum.first)];
}

}  // namespace countsel
