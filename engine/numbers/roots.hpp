// engine/numbers/roots.hpp -- where a monotone function crosses zero.
//
// The bracket always shrinks: Newton's or Ridders' guess is taken when it falls inside, halving otherwise, so
// a root is found for any monotone function, however flat or steep, and nothing runs away.
// Source: Ridders 1979, IEEE Trans. Circuits Syst. 26; Press et al. 2007, section 9.4.
// Checked by: tests/engine/numbers/roots_test.cpp.
#pragma once

#include <functional>

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

}  // namespace countsel
