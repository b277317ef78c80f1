// engine/numbers/quantiles.cpp -- where a gamma, beta, chi-square, Student's or F tail takes a given value.
//
// Newton's steps on the logarithm of the smaller tail against the logarithm of the argument: there a tail is
// nearly straight, so that 1e-300 costs no more than 0.025. Beta quantiles are found as odds, which
// keep their digits at both ends.
// Source: Newton's method; first guesses from Wilson and Hilferty 1931 and Abramowitz and Stegun
// 1964, 26.5.22. Checked by: tests/engine/numbers/distributions_test.cpp.
#include <algorithm>
#include <cmath>
#include <limits>

#include "engine/numbers/distributions.hpp"
#include "engine/numbers/large_shapes.hpp"
#include "engine/numbers/roots.hpp"

namespace countsel {
namespace {

constexpr double infinity = std::numeric_limits<double>::infinity();
constexpr double nan = std::numeric_limits<double>::quiet_NaN();

enum class Part { below, above };

// x where the tail named by `part` is `wanted` (at most about one half).
double gamma_solve(double a, double wanted, Part part) {
  if (!(a > 0) || std::isnan(wanted)) return nan;
  const bool below = part == Part::below;
  if (!(wanted > 0)) return below ? 0 : infinity;
  const double z = below ? normal_quantile(wanted) : normal_upper_quantile(wanted);
  const double root = 1 - 1 / (9 * a) + z / (3 * std::sqrt(a));
  double guess = root > 0 ? a * root * root * root : 0;
  if (below) guess = std::max(guess, std::exp((std::log(wanted) + log_gamma(a + 1)) / a));
  if (!below && !(guess > 0)) guess = a;
  const auto tail = [&](double x) {
    const double here = below ? gamma_below(a, x) : gamma_above(a, x);
    const double slope = gamma_front(a, x) / here;
    return here > 0 ? ValueSlope{std::log(here / wanted), below ? slope : -slope}
                    : ValueSlope{-infinity, below ? 1.0 : -1.0};
  };
  return log_newton_root(tail, guess, 1 + std::sqrt(a));
}

// Odds x / (1 - x) where the tail named by `part` is `wanted` (at most about one half).
double beta_solve(double a, double b, double wanted, Part part) {
  if (part == Part::above) return 1 / beta_solve(b, a, wanted, Part::below);
  if (!(a > 0 && b > 0) || std::isnan(wanted)) return nan;
  if (!(wanted > 0)) return 0;
  // The lower tail is below x^a / (a B(a, b)) for b >= 1, which is also its limit at small x.
  const double log_x = (std::log(wanted) + log_gamma(a + 1) + log_gamma(b) - log_gamma(a + b)) / a;
  double guess = log_x < -1e-3 ? std::exp(log_x) / -std::expm1(log_x) : a / b;
  if (a >= 1 && b >= 1 && !(guess == 0)) {
    const double z = normal_upper_quantile(wanted), first = 1 / (2 * a - 1), second = 1 / (2 * b - 1);
    const double h = 2 / (first + second), middle = (z * z - 3) / 6;
    const double w = z * std::sqrt(h + middle) / h - (second - first) * (middle + 5.0 / 6 - 2 / (3 * h));
    const double cornish = a / b * std::exp(-2 * w);
    if (log_x >= -1e-3 || cornish > guess) guess = cornish;
  }
  const auto tail = [&](double odds) {
    const Share share = share_of_odds(1, odds, 1);
    const double here = beta_tails(a, b, share).below;
    return here > 0 ? ValueSlope{std::log(here / wanted), beta_front(a, b, share) / here}
                    : ValueSlope{-infinity, 1};
  };
  return log_newton_root(tail, guess, 1 + std::sqrt(std::min(a, b)));
}

}  // namespace

double gamma_quantile(double a, double p) {
  return p > 0.5 ? gamma_solve(a, 1 - p, Part::above) : gamma_solve(a, p, Part::below);
}
double gamma_upper_quantile(double a, double q) {
  return q > 0.5 ? gamma_solve(a, 1 - q, Part::below) : gamma_solve(a, q, Part::above);
}
double beta_quantile_odds(double a, double b, double p) {
  return p > 0.5 ? beta_solve(a, b, 1 - p, Part::above) : beta_solve(a, b, p, Part::below);
}
double beta_upper_quantile_odds(double a, double b, double q) {
  return q > 0.5 ? beta_solve(a, b, 1 - q, Part::below) : beta_solve(a, b, q, Part::above);
}
double beta_quantile(double a, double b, double p) {
  const double odds = beta_quantile_odds(a, b, p);
  return std::isinf(odds) ? 1 : odds / (1 + odds);
}
double beta_upper_quantile(double a, double b, double q) {
  const double odds = beta_upper_quantile_odds(a, b, q);
  return std::isinf(odds) ? 1 : odds / (1 + odds);
}

double chi_square_upper_quantile(double q, double df) { return 2 * gamma_upper_quantile(df / 2, q); }

double f_upper_quantile(double q, double df1, double df2) {
  if (std::isinf(df2)) return chi_square_upper_quantile(q, df1) / df1;
  return beta_upper_quantile_odds(df1 / 2, df2 / 2, q) * df2 / df1;
}
// The square of Student's t is F on 1 and df.
double student_upper_quantile(double q, double df) {
  if (q > 0.5) return -student_upper_quantile(1 - q, df);
  if (std::isinf(df)) return normal_upper_quantile(q);
  return std::sqrt(f_upper_quantile(2 * q, 1, df));
}

}  // namespace countsel
