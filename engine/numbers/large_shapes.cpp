// engine/numbers/large_shapes.cpp -- densities through deviances, tails by quadrature outward.
#include "engine/numbers/large_shapes.hpp"

#include <algorithm>
#include <cmath>
#include <limits>

#include "engine/numbers/distributions.hpp"

namespace countsel {
namespace {

constexpr double infinity = std::numeric_limits<double>::infinity();
constexpr double two_pi = 6.2831853071795864769;
constexpr double half_log_two_pi = 0.91893853320467274178;

// Gauss-Legendre, 16 points: abscissa and weight of the positive half.
constexpr double gauss[8][2] = {
    {0.09501250983763744019, 0.1894506104550684963}, {0.2816035507792589132, 0.1826034150449235889},
    {0.4580167776572273863, 0.1691565193950025382},  {0.6178762444026437484, 0.1495959888165767321},
    {0.7554044083550030339, 0.1246289712555338721},  {0.8656312023878317439, 0.09515851168249278481},
    {0.9445750230732325761, 0.06225352393864789286}, {0.9894009349916499326, 0.02715245941175409485}};

// A log-density's fall from where we stand, at distance s outward, its linear part taken out:
//   fall(s) = slope s + ahead h(s / room_behind) + back h(-s / room_ahead),  h(u) = u - log(1 + u),
// which is minus the logarithm of (1 + s/room_behind)^ahead (1 - s/room_ahead)^back e^(-rest s).
struct Fall {
  double slope;
  double ahead, room_behind;
  double back, room_ahead;

  double at(double s) const {
    double fall = slope * s;
    if (ahead != 0) fall += ahead * log1p_gap(s / room_behind);
    if (back != 0) fall += back * log1p_gap(-s / room_ahead);
    return fall;
  }
  double slope_at(double s) const {
    double local = slope;
    if (ahead != 0) local += ahead * s / (room_behind * (room_behind + s));
    if (back != 0) local += back * s / (room_ahead * (room_ahead - s));
    return local;
  }
  double curve_at(double s) const {
    double local = 0;
    if (ahead != 0) local += ahead / ((room_behind + s) * (room_behind + s));
    if (back != 0) local += back / ((room_ahead - s) * (room_ahead - s));
    return std::max(local, 0.0);
  }
};

// The integral of exp(-fall) from here to the end of the support. A panel is as wide as lets the fall
// grow by about 8, which 16 points integrate to full precision, and at most twice the distance to the
// singularity behind.
double integrate_outward(const Fall& fall) {
  double total = 0, from = 0;
  for (int panel = 0; panel < 1000; ++panel) {
    const double slope = fall.slope_at(from), curve = fall.curve_at(from);
    double width = 16 / (slope + std::sqrt(slope * slope + 16 * curve));
    if (fall.ahead != 0) width = std::min(width, 2 * (fall.room_behind + from));
    if (fall.back != 0) width = std::min(width, fall.room_ahead - from);
    const double half = width / 2, middle = from + half;
    double part = 0;
    for (const auto& [node, weight] : gauss)
      part += weight * (std::exp(-fall.at(middle - half * node)) + std::exp(-fall.at(middle + half * node)));
    total += half * part;
    from += width;
    if (half * part <= 1e-17 * total || (fall.back != 0 && from >= fall.room_ahead)) break;
  }
  return total;
}

// I_x(a, b) for x at or below the mean: `excess` = a - (a + b) x >= 0.
double beta_lower(double a, double b, double excess, const Share& share) {
  const double x = share.chance(), y = share.other(), front = beta_front(a, b, share);
  if (!(front > 0)) return 0;
  if (a < 20) {  // towards a small shape's end: the density need not be smooth there, the series is
    double term = 1, total = 1;
    for (double n = 0; term > 1e-17 * total && n < 1e6; ++n) {
      term *= (a + b + n) * x / (a + 1 + n);
      total += term;
    }
    return front / a * total;
  }
  return front / (x * y) * integrate_outward({(excess + x - y) / (x * y), b - 1, y, a - 1, x});
}

}  // namespace

// With r = u / (2 + u), log(1 + u) = 2 (r + r^3/3 + r^5/5 + ...) and u - 2 r = r u.
double log1p_gap(double u) {
  if (!(u > -0.6 && u < 1.2)) return u - std::log1p(u);
  static constexpr double odd[] = {1,       1. / 3,  1. / 5,  1. / 7,  1. / 9,  1. / 11, 1. / 13,
                                   1. / 15, 1. / 17, 1. / 19, 1. / 21, 1. / 23, 1. / 25, 1. / 27,
                                   1. / 29, 1. / 31, 1. / 33, 1. / 35, 1. / 37, 1. / 39, 1. / 41,
                                   1. / 43, 1. / 45, 1. / 47, 1. / 49};
  const double r = u / (2 + u), q = r * r;
  double series = 0;
  const int terms = q < 1e-5 ? 3 : q < 5e-4 ? 5 : q < 0.02 ? 10 : 24;
  for (int n = terms; n >= 1; --n) series = series * q + odd[n];
  return r * (u - 2 * q * series);
}

// Near 1 the difference carries the digits, near 0 and far above the ratio does.
double ratio_gap(double ratio, double less_one) {
  if (ratio > 0.4 && ratio < 2.2) return log1p_gap(less_one);
  return std::isinf(ratio) ? ratio : less_one - std::log(ratio);
}

double stirling_error(double a) {
  if (a < 16) return log_gamma(a + 1) - (a + 0.5) * std::log(a) + a - half_log_two_pi;
  const double q = 1 / (a * a);
  return (1.0 / 12 -
          q * (1.0 / 360 - q * (1.0 / 1260 - q * (1.0 / 1680 - q * (1.0 / 1188 - q * 691.0 / 360360))))) /
         a;
}

double gamma_front(double a, double x) {
  return std::sqrt(a / two_pi) * std::exp(-stirling_error(a) - a * ratio_gap(x / a, (x - a) / a));
}

// Upward from x, f(x + s) / f(x) = (1 + s/x)^(a-1) e^-s; downward (1 - s/x)^(a-1) e^s.
Tails large_gamma_tails(double a, double x) {
  const double excess = x - a, density = gamma_front(a, x) / x;
  if (!(density > 0)) return excess > 0 ? Tails{1, 0} : Tails{0, 1};
  if (excess < 0) {
    const double below = density * integrate_outward({-(excess + 1) / x, 0, 1, a - 1, x});
    return {below, 1 - below};
  }
  const double above = density * integrate_outward({(excess + 1) / x, a - 1, x, 0, infinity});
  return {1 - above, above};
}

// a log((a+b) x / a) + b log((a+b) y / b) with the linear parts, which cancel, left out.
double beta_front(double a, double b, const Share& share) {
  const double excess = above_expected(a, b, share);
  return std::sqrt(a / (a + b) * b / two_pi) *
         std::exp(stirling_error(a + b) - stirling_error(a) - stirling_error(b) -
                  (a * ratio_gap((a + b) / a * share.chance(), -excess / a) +
                   b * ratio_gap((a + b) / b * share.other(), excess / b)));
}

Tails large_beta_tails(double a, double b, const Share& share) {
  if (!(share.part > 0)) return {0, 1};
  if (!(share.rest > 0)) return {1, 0};
  const double excess = above_expected(a, b, share);
  if (excess >= 0) {
    const double below = beta_lower(a, b, excess, share);
    return {below, 1 - below};
  }
  const double above = beta_lower(b, a, -excess, share.turned());
  return {1 - above, above};
}

}  // namespace countsel
