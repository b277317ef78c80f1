// engine/rates/two_rates_e_test.cpp -- the E-test: how often two estimated rates would differ so much.
//
// Both rates are set to their estimate under the null; the p-value is the chance of a statistic at least as
// far out. The statistic rises with the first count and falls with the second, so for each second count the
// first counts that lie far out are those from a bound on, and the bound only moves up: one walk
// along it sums the whole plane.
// Source: Krishnamoorthy and Thomson 2004, J. Stat. Plan. Inference 119, 23-35.
#include <algorithm>
#include <cmath>
#include <vector>

#include "engine/numbers/distributions.hpp"
#include "engine/rates/checks.hpp"
#include "engine/rates/two_rates_parts.hpp"

namespace countsel {
namespace {

constexpr double most_summed = 2e7;

// The chances of a Poisson's values in a stretch from `first` on, and of reaching each at least.
struct Stretch {
  double first;
  std::vector<double> exactly, at_least;

  // All values whose chance is at least `cut` times the likeliest one's.
  Stretch(double mean, double cut) {
    const double mode = std::floor(mean), most = poisson_exactly(mode, mean);
    std::vector<double> down;
    double chance = most;
    for (double k = mode; k > 0 && chance > cut * most; --k) {
      chance *= k / mean;
      down.push_back(chance);
    }
    first = mode - static_cast<double>(down.size());
    exactly.assign(down.rbegin(), down.rend());
    exactly.push_back(most);
    chance = most;
    for (double k = mode + 1; chance > cut * most; ++k) {
      chance *= mean / k;
      exactly.push_back(chance);
    }
    at_least.resize(exactly.size() + 1);
    for (std::size_t i = exactly.size(); i-- > 0;) at_least[i] = at_least[i + 1] + exactly[i];
  }
  double reaching(double k) const {
    if (k <= first) return 1;
    const double place = k - first;
    return place < static_cast<double>(exactly.size()) ? at_least[static_cast<std::size_t>(place)] : 0;
  }
};

// The standardised difference of counts i and j: chances p and q say how they share a common rate.
struct Statistic {
  ETestStatistic kind;
  double p, q;

  double operator()(double i, double j) const {
    if (i + j == 0) return 0;
    const double variance = kind == ETestStatistic::score ? (i + j) * p * q : i * q * q + j * p * p;
    return (i * q - j * p) / std::sqrt(variance);
  }
};

// P(statistic >= least) when both rates share theirs. `cut` bounds what may be left out. Pairs that tie with
// what was seen differ from it by rounding alone and count.
double chance_above(const Statistic& statistic, double least, double n, double cut) {
  const Stretch first(n * statistic.p, cut), second(n * statistic.q, cut);
  const double bound = least - 1e-11 * (1 + std::abs(least));
  double total = 0, i = first.first;
  const double last = first.first + static_cast<double>(first.exactly.size());
  for (std::size_t place = 0; place < second.exactly.size(); ++place) {
    const double j = second.first + static_cast<double>(place);
    while (i < last && statistic(i, j) < bound) ++i;
    total += second.exactly[place] * first.reaching(i);
  }
  return total;
}

}  // namespace

// With the sum n fixed and excess = i - n p, the score statistic is excess over a constant, so the other
// side's point is -excess. The unpooled variance is n p q + excess (q - p): the statistic's square takes a
// value at two points whose product is minus that square times n p q.
double e_test_given_sum(double i, double j, const Share& share, ETestStatistic kind) {
  const double p = share.chance(), q = share.other(), n = i + j;
  const double excess = above_expected(i, j, share);
  if (excess < 0) return e_test_given_sum(j, i, share.turned(), kind);
  const double even = n * p * q;
  const double other = kind == ETestStatistic::score ? excess : excess * even / (even + excess * (q - p));
  const double far_i = n * p - other, far_j = n * q + other;
  const double far = far_i < 0 ? 0 : p_above(TestMethod::mid_p, far_j, far_i, share.turned());
  return std::min(1.0, p_above(TestMethod::mid_p, i, j, share) + far);
}

double e_test(const TwoRates& data, ETestStatistic kind, Direction direction, double null_ratio) {
  require_two_rates(data);
  require_positive(null_ratio, "null ratio");
  const double x1 = data.count1, x0 = data.count0, n = x1 + x0;
  if (n == 0) return 1;
  const Share share = share_under(data, null_ratio);
  if (n > most_summed)
    return direction == Direction::either ? e_test_given_sum(x1, x0, share, kind)
                                          : ratio_test(data, TestMethod::mid_p, direction, null_ratio);
  const Statistic above{kind, share.chance(), share.other()}, below{kind, above.q, above.p};
  const double seen = above(x1, x0);
  // A pair left out is 1e-25 as likely as the p-value is large, by the size of the conditional one.
  const double conditional =
      std::min(p_above(TestMethod::mid_p, x1, x0, share), p_above(TestMethod::mid_p, x0, x1, share.turned()));
  const double cut = std::max(1e-25 * std::min(conditional, 1.0), 1e-305);
  if (direction == Direction::above) return chance_above(above, seen, n, cut);
  if (direction == Direction::below) return chance_above(below, -seen, n, cut);
  if (seen == 0) return 1;
  const double far = std::abs(seen);
  return std::min(1.0, chance_above(above, far, n, cut) + chance_above(below, far, n, cut));
}

}  // namespace countsel
