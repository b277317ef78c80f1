// engine/numbers/roots.cpp -- a bracket that always shrinks.
#include "engine/numbers/roots.hpp"

#include <algorithm>
#include <cmath>
#include <limits>

namespace countsel {
namespace {

constexpr double nan = std::numeric_limits<double>::quiet_NaN();
constexpr double close_enough = 4 * std::numeric_limits<double>::epsilon();
constexpr int most_steps =
    400;  // halving the doubles' whole range takes about 2100; no caller starts so wide

bool same_sign(double a, double b) { return (a > 0) == (b > 0); }

bool narrow(double low, double high) {
  return high - low <= close_enough * std::max(std::abs(low), std::abs(high)) ||
         high - low < std::numeric_limits<double>::min();
}

}  // namespace

double bracketed_root(const Function& f, double low, double high) {
  double f_low = f(low), f_high = f(high);
  if (f_low == 0) return low;
  if (f_high == 0) return high;
  if (std::isnan(f_low) || std::isnan(f_high) || same_sign(f_low, f_high)) return nan;
  double last = nan;
  for (int step = 0; step < most_steps && !narrow(low, high); ++step) {
    const double middle = low + (high - low) / 2, f_middle = f(middle);
    if (f_middle == 0) return middle;
    if (std::isnan(f_middle)) return nan;
    // Ridders: an exponential through the three values, straightened, then the false position.
    const double size = std::max({std::abs(f_low), std::abs(f_middle), std::abs(f_high)});
    const double l = f_low / size, m = f_middle / size, h = f_high / size;
    const double guess = middle + (middle - low) * (l > h ? 1 : -1) * m / std::sqrt(m * m - l * h);
    (same_sign(f_middle, f_low) ? low : high) = middle;
    (same_sign(f_middle, f_low) ? f_low : f_high) = f_middle;
    if (!(guess > low && guess < high)) continue;
    const double f_guess = f(guess);
    if (f_guess == 0 || std::abs(guess - last) <= close_enough * std::abs(guess)) return guess;
    if (std::isnan(f_guess)) return nan;
    last = guess;
    (same_sign(f_guess, f_low) ? low : high) = guess;
    (same_sign(f_guess, f_low) ? f_low : f_high) = f_guess;
  }
  return low + (high - low) / 2;
}

double newton_root(const std::function<ValueSlope(double)>& f, double guess, double low, double high) {
  const bool rising = f(high).value > 0;
  double x = std::clamp(guess, low, high);
  for (int step = 0; step < most_steps && !narrow(low, high); ++step) {
    const ValueSlope here = f(x);
    if (here.value == 0) return x;
    if (std::isnan(here.value)) return nan;
    ((here.value > 0) == rising ? high : low) = x;
    const double change = -here.value / here.slope, width = high - low;
    double next = x + change;
    if (std::abs(change) <= close_enough * std::abs(x)) return std::clamp(next, low, high);
    if (!(next > low && next < high)) next = low + width / 2;
    if (next == x) return x;
    x = next;
  }
  return x;
}

}  // namespace countsel
