// engine/numbers/distributions.cpp -- the one place that includes Boost.Math distributions.
#include "engine/numbers/distributions.hpp"

#include <algorithm>
#include <boost/math/special_functions/beta.hpp>
#include <boost/math/special_functions/digamma.hpp>
#include <boost/math/special_functions/erf.hpp>
#include <boost/math/special_functions/gamma.hpp>
#include <boost/math/special_functions/trigamma.hpp>
#include <cmath>
#include <limits>

#include "engine/numbers/large_shapes.hpp"

namespace countsel {
namespace {

namespace bm = boost::math;
namespace bp = boost::math::policies;

using OurPolicy =
    bp::policy<bp::promote_double<false>, bp::promote_float<false>, bp::domain_error<bp::ignore_error>,
               bp::pole_error<bp::ignore_error>, bp::overflow_error<bp::ignore_error>,
               bp::underflow_error<bp::ignore_error>, bp::denorm_error<bp::ignore_error>,
               bp::evaluation_error<bp::ignore_error>, bp::rounding_error<bp::ignore_error>,
               bp::indeterminate_result_error<bp::ignore_error>>;
constexpr OurPolicy policy;
constexpr double root_two = 1.4142135623730950488;
constexpr double half_pi = 1.5707963267948966192;
// Boost's tails lose digits at large shapes (1e-12 at 1e4, 1e-8 at 1e9) and where powers underflow on the
// way to a tail that does not; those of large_shapes do neither, but cost ten times as much.
constexpr double large_shape = 500;
constexpr double small_tail = 1e-200;

}  // namespace

double normal_below(double z) { return bm::erfc(-z / root_two, policy) / 2; }
double normal_above(double z) { return bm::erfc(z / root_two, policy) / 2; }
double normal_quantile(double p) { return -normal_upper_quantile(p); }
double normal_upper_quantile(double q) { return root_two * bm::erfc_inv(2 * q, policy); }

double gamma_below(double a, double x) {
  if (std::isinf(x)) return 1;
  if (!(x > 0)) return bm::gamma_p(a, x, policy);
  if (a >= large_shape) return large_gamma_tails(a, x).below;
  const double below = bm::gamma_p(a, x, policy);
  return below < small_tail && a > 20 ? large_gamma_tails(a, x).below : below;
}
double gamma_above(double a, double x) {
  if (std::isinf(x)) return 0;
  if (!(x > 0)) return bm::gamma_q(a, x, policy);
  if (a >= large_shape) return large_gamma_tails(a, x).above;
  const double above = bm::gamma_q(a, x, policy);
  return above < small_tail && a > 20 ? large_gamma_tails(a, x).above : above;
}
double gamma_density(double a, double x) {
  return a >= large_shape && x > 0 ? gamma_front(a, x) / x : bm::gamma_p_derivative(a, x, policy);
}
double log_gamma(double x) { return bm::lgamma(x, policy); }
double digamma(double x) { return bm::digamma(x, policy); }
double trigamma(double x) { return bm::trigamma(x, policy); }

double poisson_at_most(double k, double mu) { return k < 0 ? 0 : gamma_above(k + 1, mu); }
double poisson_at_least(double k, double mu) { return k <= 0 ? 1 : gamma_below(k, mu); }
double poisson_exactly(double k, double mu) {
  if (k < 0 || !(mu >= 0)) return std::isnan(mu) ? mu : 0;
  if (k == 0) return std::exp(-mu);
  return mu > 0 && std::isfinite(mu) ? gamma_front(k, mu) / k : 0;
}

Tails beta_tails(double a, double b, const Share& share) {
  if (a == 0.5 && b == 0.5) {  // the arcsine law
    const double part = std::sqrt(share.part), rest = std::sqrt(share.rest);
    return {std::atan2(part, rest) / half_pi, std::atan2(rest, part) / half_pi};
  }
  if (std::max(a, b) >= large_shape) return large_beta_tails(a, b, share);
  const double x = share.chance(), y = share.other();
  const Tails tails = x <= y ? Tails{bm::ibeta(a, b, x, policy), bm::ibetac(a, b, x, policy)}
                             : Tails{bm::ibetac(b, a, y, policy), bm::ibeta(b, a, y, policy)};
  return std::min(tails.below, tails.above) < small_tail ? large_beta_tails(a, b, share) : tails;
}
double beta_below(double a, double b, double x) { return beta_tails(a, b, share_of(x)).below; }
double beta_above(double a, double b, double x) { return beta_tails(a, b, share_of(x)).above; }
double beta_density(double a, double b, double x) {
  if (!(x > 0 && x < 1)) return bm::ibeta_derivative(a, b, x, policy);
  const Share share = share_of(x);
  return beta_front(a, b, share) / (x * share.rest);
}

double binomial_at_most(double k, double n, const Share& share) {
  if (k < 0) return 0;
  return k >= n ? 1 : beta_tails(k + 1, n - k, share).above;
}
double binomial_at_least(double k, double n, const Share& share) {
  if (k <= 0) return 1;
  return k > n ? 0 : beta_tails(k, n - k + 1, share).below;
}
// At both ends the chance is a power: of the other chance at 0, of the chance itself at n.
double binomial_exactly(double k, double n, const Share& share) {
  if (k < 0 || k > n) return 0;
  if (k == 0) return std::exp(-n * std::log1p(share.part / share.rest));
  if (k == n) return std::exp(-n * std::log1p(share.rest / share.part));
  return beta_front(k, n - k, share) * (n / k) / (n - k);
}
double binomial_at_most(double k, double n, double p) { return binomial_at_most(k, n, share_of(p)); }
double binomial_at_least(double k, double n, double p) { return binomial_at_least(k, n, share_of(p)); }
double binomial_exactly(double k, double n, double p) { return binomial_exactly(k, n, share_of(p)); }

double chi_square_below(double x, double df) { return gamma_below(df / 2, x / 2); }
double chi_square_above(double x, double df) { return gamma_above(df / 2, x / 2); }

// t^2 / (t^2 + df) is beta with shapes 1/2 and df / 2; a huge t is divided out first.
double student_above(double t, double df) {
  if (std::isnan(t) || !(df > 0)) return std::numeric_limits<double>::quiet_NaN();
  if (std::isinf(df)) return normal_above(t);
  if (std::isinf(t)) return t > 0 ? 0 : 1;
  const Pair square = two_product(t, t);
  const double size = std::abs(t);
  const Share share = size < 1e100 ? Share{square.high, df, square.low, 0} : Share{size, df / size};
  const double tail = beta_tails(0.5, df / 2, share).above / 2;
  return t >= 0 ? tail : 1 - tail;
}
double f_above(double f, double df1, double df2) {
  if (std::isnan(f)) return f;
  if (!(f > 0)) return 1;
  if (std::isinf(df2)) return chi_square_above(df1 * f, df1);
  return std::isinf(f) ? 0 : beta_tails(df1 / 2, df2 / 2, share_of_odds(df1, f, df2)).above;
}

}  // namespace countsel
