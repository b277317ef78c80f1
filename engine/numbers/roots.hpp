// engine/numbers/roots.hpp -- where a monotone function crosses zero.
//
// The bracket always shrinks: Newton's or Ridders' guess is taken when it falls inside, halving otherwise, so
// a root is found for any monotone function, however flat or steep, and nothing runs away.
// Source: Ridders 1979, IEEE Trans. Circuits Syst. 26; Press et al. 2007, section 9.4.
// Checked by: tests/engine/numbers/roots_test.cpp.
#pragma once

#include <cmath>
#include <functional>
#include <limits>

namespace countsel {

using Function = std::function<double(double)>;

/// Root of a monotone function between low and high, whose values have opposite signs there (or one is
/// 0). Infinite function values are allowed.
/// Returns the root to about 4 units in the last place; NaN where there is no change of sign or the function
/// is NaN. Cost: some ten evaluations.
double bracketed_root(const Function& f, double low, double high);

/// A function's value and slope.
struct ValueSlope {
  double value, slope;
};

/// Root of a monotone function by Newton's steps from `guess`, kept inside [low, high]; a step that
/// leaves the bracket or hardly shrinks it is replaced by halving. Returns as bracketed_root; an end
/// of the bracket where the function does not change sign.
double newton_root(const std::function<ValueSlope(double)>& f, double guess, double low, double high);

/// Root in x > 0 of a monotone gap that is nearly straight against log x, as the logarithm of a tail over a
/// wanted one is. `f(x)` gives the gap and its slope against log x; its slope's sign must not change.
///   guess      above 0; a good one saves steps, a bad one is survived
///   sharpness  about how much the slope changes, relatively, over a unit of log x
/// Returns the root to a unit in the last place; 0 or infinity where steps run off to there; NaN where f
/// is NaN. A step of s leaves an error of about s^2 sharpness, so steps stop once that is below rounding.
template <class F>
double log_newton_root(const F& f, double guess, double sharpness) {
  constexpr double infinity = std::numeric_limits<double>::infinity();
  double x = guess, low = 0, high = infinity;
  for (int step = 0; step < 300; ++step) {
    if (!(x > 0) || std::isinf(x)) return x;
    const ValueSlope here = f(x);
    if (std::isnan(here.value) || here.value == 0) return here.value == 0 ? x : here.value;
    ((here.value > 0) == (here.slope > 0) ? high : low) = x;
    const double change = -here.value / here.slope;
    double next = x * std::exp(change);
    if (!(next > low && next < high)) {
      if (std::abs(change) < 1e-15) return x;
      next = low == 0 ? high / 16 : std::isinf(high) ? low * 16 : std::sqrt(low) * std::sqrt(high);
    }
    if (next == x || std::abs(change) * sharpness < 1e-8) return next;
    x = next;
  }
  return x;
}

}  // namespace countsel
