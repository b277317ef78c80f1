// engine/rates/expected_could_show.cpp -- the critical counts by bisection, the ratios by gamma quantiles.
#include "engine/rates/expected_could_show.hpp"

#include <cmath>
#include <limits>

#include "engine/numbers/distributions.hpp"
#include "engine/rates/checks.hpp"
#include "engine/rates/expected_ratio.hpp"

namespace countsel {
namespace {

constexpr double no_value = std::numeric_limits<double>::quiet_NaN();
constexpr double often_enough = 0.8;

// The first whole number from `from` on, in steps of `sign`, that is rejected; p-values fall with the
// distance from the expected number. NaN if none is before 0.
template <class Rejects>
double first_rejected(double from, double sign, Rejects rejects) {
  if (rejects(from)) return from;
  double kept = from, beyond = from;
  for (double step = 1; beyond == kept; step *= 2) {
    if (sign < 0 && kept == 0) return no_value;
    beyond = std::fmax(0, kept + sign * step);
    if (!rejects(beyond)) kept = beyond;
  }
  while (std::abs(beyond - kept) > 1) {
    const double middle = std::trunc((kept + beyond) / 2);
    (rejects(middle) ? beyond : kept) = middle;
  }
  return beyond;
}

}  // namespace

CouldShow expected_could_show(double expected, TestMethod test, double confidence, Direction direction) {
  require_probability(confidence, "confidence");
  expected_test(0, expected, test, direction);  // refuses what cannot be tested
  CouldShow could{no_value, no_value};
  if (expected == 0) return could;
  const auto rejects = [&](double count) {
    return expected_test(count, expected, test, direction) < 1 - confidence;
  };
  if (direction != Direction::below) {
    const double count = first_rejected(std::ceil(expected), 1, rejects);
    could.above = gamma_quantile(count, often_enough) / expected;
  }
  if (direction != Direction::above) {
    const double count = first_rejected(std::floor(expected), -1, rejects);
    could.below = std::isnan(count) ? no_value : gamma_upper_quantile(count + 1, often_enough) / expected;
  }
  return could;
}

}  // namespace countsel
