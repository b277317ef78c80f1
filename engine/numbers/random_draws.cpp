// engine/numbers/random_draws.cpp -- normal, gamma, Poisson, binomial and multinomial draws.
//
// A rejection step compares logarithms. The C library's differ in the last bit between machines, which
// would now and then change a draw, so the few functions needed are written out here.
#include <algorithm>
#include <array>
#include <cmath>

#include "engine/numbers/random.hpp"

namespace countsel {
namespace {

constexpr double ln2_high = 0x1.62e42fefa38p-1;  // the leading bits: k * ln2_high is exact
constexpr double ln2_low = 0x1.ef35793c7673p-45;

// 1 / n as a table: a division costs more than the rest of a step.
constexpr std::size_t searched = 200;
constexpr auto reciprocals = [] {
  std::array<double, searched + 2> table{};
  for (std::size_t n = 1; n < table.size(); ++n) table[n] = 1 / static_cast<double>(n);
  return table;
}();

// Below this mean a search from 0 beats rejection.
constexpr double search_below = 25;

// 2 artanh(z), |z| <= 0.18.
double two_artanh(double z) {
  const double z2 = z * z;
  double sum = 0;
  for (std::size_t n = 23; n >= 3; n -= 2) sum = z2 * (reciprocals[n] + sum);
  return 2 * z + 2 * z * sum;
}

double portable_log(double x) {
  int exponent = 0;
  double m = std::frexp(x, &exponent);
  if (m < 0.70710678118654752) {
    m *= 2;
    --exponent;
  }
  const double k = exponent;
  return k * ln2_high + (k * ln2_low + two_artanh((m - 1) / (m + 1)));
}

double portable_log1p(double x) { return std::abs(x) < 0.3 ? two_artanh(x / (2 + x)) : portable_log(1 + x); }

double portable_exp(double x) {
  if (x < -745) return 0;
  const double k = std::floor(x / (ln2_high + ln2_low) + 0.5);
  const double r = (x - k * ln2_high) - k * ln2_low;
  double sum = 1;
  for (std::size_t n = 14; n >= 1; --n) sum = 1 + r * reciprocals[n] * sum;
  return std::ldexp(sum, static_cast<int>(k));
}

// log k! less its Stirling leading part (k + 1/2) log(k + 1) - (k + 1) + log(2 pi) / 2.
double stirling_rest(double k) {
  static constexpr double table[] = {0.08106146679532726, 0.04134069595540929, 0.02767792568499834,
                                     0.02079067210376509, 0.01664469118982119, 0.01387612882307075,
                                     0.01189670994589177, 0.01041126526197209, 0.009255462182712733,
                                     0.008330563433362871};
  if (k < 10) return table[static_cast<int>(k)];
  const double n = k + 1;
  const double n2 = n * n;
  return (1.0 / 12 - (1.0 / 360 - 1.0 / 1260 / n2) / n2) / n;
}

double log_factorial(double k) {
  constexpr double half_log_two_pi = 0.91893853320467274;
  return (k + 0.5) * portable_log(k + 1) - (k + 1) + half_log_two_pi + stirling_rest(k);
}

// (1 - p)^n for whole n. Squaring is exact enough for small n and much the faster.
double power_of_rest(double p, double n) {
  if (n > 1e5) return portable_exp(n * portable_log1p(-p));
  double square = 1 - p, product = 1;
  for (auto left = static_cast<std::uint32_t>(n); left != 0; left >>= 1) {
    if ((left & 1U) != 0) product *= square;
    square *= square;
  }
  return product;
}

// Sequential search from 0 for a law whose chances follow p(k + 1) = p(k) * step(k) / (k + 1). A uniform too
// close to 1 for the rounded chances to reach is drawn again.
template <typename Step>
double search_up(RandomStream& stream, double at_zero, double last, Step step) {
  const auto end = static_cast<std::size_t>(std::min(last, static_cast<double>(searched)));
  for (;;) {
    double left = stream.uniform();
    double chance = at_zero;
    for (std::size_t k = 0; k <= end; ++k) {
      if (left <= chance) return static_cast<double>(k);
      left -= chance;
      chance *= step(static_cast<double>(k)) * reciprocals[k + 1];
    }
  }
}

double binomial_by_rejection(RandomStream& stream, double n, double p) {
  const double odds = p / (1 - p);
  const double sd = std::sqrt(n * p * (1 - p));
  const double b = 1.15 + 2.53 * sd;
  const double a = -0.0873 + 0.0248 * b + 0.01 * p;
  const double centre = n * p + 0.5;
  const double sure = 0.92 - 4.2 / b;
  const double alpha = (2.83 + 5.1 / b) * sd;
  const double mode = std::floor((n + 1) * p);
  double at_mode = 0;  // found when first needed: most draws are accepted without
  for (;;) {
    const double u = stream.uniform() - 0.5;
    const double v = stream.uniform();
    const double edge = 0.5 - std::abs(u);
    const double k = std::floor((2 * a / edge + b) * u + centre);
    if (edge >= 0.07 && v <= sure) return k;
    if (k < 0 || k > n) continue;
    if (at_mode == 0)
      at_mode = (mode + 0.5) * portable_log((mode + 1) / (odds * (n - mode + 1))) + stirling_rest(mode) +
                stirling_rest(n - mode);
    const double bound = at_mode + (n + 1) * portable_log1p((k - mode) / (n - k + 1)) +
                         (k + 0.5) * portable_log(odds * (n - k + 1) / (k + 1)) - stirling_rest(k) -
                         stirling_rest(n - k);
    if (portable_log(v * alpha / (a / (edge * edge) + b)) <= bound) return k;
  }
}

double poisson_by_rejection(RandomStream& stream, double mean) {
  const double b = 0.931 + 2.53 * std::sqrt(mean);
  const double a = -0.059 + 0.02483 * b;
  const double log_inverse_alpha = portable_log(1.1239 + 1.1328 / (b - 3.4));
  const double sure = 0.9277 - 3.6224 / (b - 2);
  const double log_mean = portable_log(mean);
  for (;;) {
    const double u = stream.uniform() - 0.5;
    const double v = stream.uniform();
    const double edge = 0.5 - std::abs(u);
    const double k = std::floor((2 * a / edge + b) * u + mean + 0.43);
    if (edge >= 0.07 && v <= sure) return k;
    if (k < 0 || (edge < 0.013 && v > edge)) continue;
    const double log_ratio = portable_log(v) + log_inverse_alpha - portable_log(a / (edge * edge) + b);
    if (log_ratio <= k * log_mean - mean - log_factorial(k)) return k;
  }
}

}  // namespace

double draw_normal(RandomStream& stream) {
  for (;;) {
    const double x = 2 * stream.uniform() - 1;
    const double y = 2 * stream.uniform() - 1;
    const double square = x * x + y * y;
    if (square < 1 && square > 0) return x * std::sqrt(-2 * portable_log(square) / square);
  }
}

double draw_gamma(RandomStream& stream, double shape) {
  if (shape < 1) {
    const double larger = draw_gamma(stream, shape + 1);
    return larger * portable_exp(portable_log(stream.uniform()) / shape);
  }
  const double d = shape - 1.0 / 3;
  const double c = 1 / std::sqrt(9 * d);
  for (;;) {
    const double x = draw_normal(stream);
    const double root = 1 + c * x;
    if (root <= 0) continue;
    const double v = root * root * root;
    const double log_u = portable_log(stream.uniform());
    if (log_u < 0.5 * x * x + d * (1 - v + portable_log(v))) return d * v;
  }
}

double draw_poisson(RandomStream& stream, double mean) {
  if (mean >= search_below) return poisson_by_rejection(stream, mean);
  return search_up(stream, portable_exp(-mean), searched, [mean](double) { return mean; });
}

double draw_binomial(RandomStream& stream, double trials, double chance) {
  if (trials == 0 || chance <= 0) return 0;
  if (chance >= 1) return trials;
  if (chance > 0.5) return trials - draw_binomial(stream, trials, 1 - chance);
  if (trials * chance >= search_below) return binomial_by_rejection(stream, trials, chance);
  const double odds = chance / (1 - chance);
  return search_up(stream, power_of_rest(chance, trials), trials,
                   [odds, trials](double k) { return odds * (trials - k); });
}

std::vector<double> conditional_chances(std::span<const double> weights) {
  std::vector<double> chances(weights.size());
  double rest = 0;
  for (std::size_t i = weights.size(); i-- > 0;) {
    rest += weights[i];
    chances[i] = rest > 0 ? weights[i] / rest : 0;
  }
  return chances;
}

void draw_multinomial(RandomStream& stream, double events, std::span<const double> conditional,
                      std::span<double> counts) {
  double left = events;
  for (std::size_t i = 0; i < counts.size(); ++i) {
    counts[i] = draw_binomial(stream, left, conditional[i]);
    left -= counts[i];
  }
}

}  // namespace countsel
