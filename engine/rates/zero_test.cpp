// engine/rates/zero_test.cpp -- the score test for too many zeros.
#include "engine/rates/zero_test.hpp"

#include <algorithm>
#include <cmath>
#include <limits>

#include "engine/numbers/distributions.hpp"
#include "engine/numbers/sums.hpp"

namespace countsel {
namespace {

// exp(x) - 1 - x over exp(shift), x >= 0, without the loss of a small x.
double rest_of_exponential(double x, double shift) {
  if (x > 0.1) return std::exp(x - shift) - (1 + x) * std::exp(-shift);
  double term = x * x / 2, total = 0;
  for (int n = 3; term > 1e-18 * total; ++n, term *= x / (n - 1)) total += term;
  return total * std::exp(-shift);
}

}  // namespace

ZeroTest zero_test(const CountRows& rows) {
  require_count_rows(rows);
  constexpr double nan = std::numeric_limits<double>::quiet_NaN();
  const CountTotals totals = count_totals(rows);
  const double rate = totals.events / totals.exposure;
  Sum expected;
  double largest = 0;
  for (std::size_t i = 0; i < rows.size(); ++i) {
    if (rows.seen(i) == 0) continue;
    const double mean = rate * rows.exposure(i);
    expected.add(rows.seen(i) * std::exp(-mean));
    largest = std::max(largest, mean);
  }
  ZeroTest test{totals.zeros, expected.value(), nan, nan, nan, nan};
  if (totals.events == 0) return test;

  // Both sums are taken over exp(largest), its root above the fraction, so that nothing overflows before
  // the answer itself does.
  Sum above, below;
  for (std::size_t i = 0; i < rows.size(); ++i) {
    const double times = rows.seen(i);
    if (times == 0) continue;
    const double mean = rate * rows.exposure(i);
    const double weight = rows.counts[i] == 0 ? std::exp(mean - largest / 2) : 0;
    above.add(times * (weight - std::exp(-largest / 2)));
    below.add(times * rest_of_exponential(mean, largest));
  }
  test.z = above.value() / std::sqrt(below.value());
  test.statistic = test.z * test.z;
  test.p_either = chi_square_above(test.statistic, 1);
  test.p_more = normal_above(test.z);
  return test;
}

}  // namespace countsel
