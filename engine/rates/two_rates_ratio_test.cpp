// engine/rates/two_rates_ratio_test.cpp -- could the ratio of two rates be what the null says?
#include "engine/numbers/distributions.hpp"
#include "engine/rates/checks.hpp"
#include "engine/rates/two_rates_parts.hpp"

namespace countsel {

double ratio_test(const TwoRates& data, TestMethod method, Direction direction, double null_ratio) {
  require_two_rates(data);
  require_positive(null_ratio, "null ratio");
  const double x1 = data.count1, x0 = data.count0;
  if (x1 + x0 == 0) return 1;  // nothing happened: nothing speaks against any ratio
  const Share share = share_under(data, null_ratio);
  switch (method) {
    case TestMethod::score:
      return directed_p(direction, score_deviate(x1, x0, share));
    case TestMethod::likelihood:
      return directed_p(direction, likelihood_deviate(x1, x0, share));
    case TestMethod::e_test:
      return e_test(data, ETestStatistic::unpooled, direction, null_ratio);
    case TestMethod::exact:
    case TestMethod::mid_p:
      break;
  }
  return directed_p(direction,
                    Tails{p_above(method, x0, x1, share.turned()), p_above(method, x1, x0, share)});
}

// Gamma(count + 1/2) over exposure each: the first's share of both gammas is beta, and rate 1 is higher where
// it exceeds exposure 1's share.
double posterior_higher(const TwoRates& data) {
  require_two_rates(data);
  return beta_tails(data.count1 + 0.5, data.count0 + 0.5, share_under(data, 1)).above;
}

}  // namespace countsel
