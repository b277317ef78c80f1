// engine/numbers/distributions.cpp -- the one place that includes Boost.Math distributions.
#include "engine/numbers/distributions.hpp"

#include <boost/math/distributions/students_t.hpp>
#include <boost/math/special_functions/beta.hpp>
#include <boost/math/special_functions/digamma.hpp>
#include <boost/math/special_functions/erf.hpp>
#include <boost/math/special_functions/gamma.hpp>
#include <boost/math/special_functions/trigamma.hpp>
#include <cmath>
#include <limits>

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
constexpr double infinity = std::numeric_limits<double>::infinity();
constexpr double root_two = 1.4142135623730950488;

}  // namespace

double normal_below(double z) { return bm::erfc(-z / root_two, policy) / 2; }
double normal_above(double z) { return bm::erfc(z / root_two, policy) / 2; }
double normal_quantile(double p) { return -normal_upper_quantile(p); }
double normal_upper_quantile(double q) { return root_two * bm::erfc_inv(2 * q, policy); }

double gamma_below(double a, double x) { return std::isinf(x) ? 1 : bm::gamma_p(a, x, policy); }
double gamma_above(double a, double x) { return std::isinf(x) ? 0 : bm::gamma_q(a, x, policy); }
double gamma_density(double a, double x) { return bm::gamma_p_derivative(a, x, policy); }
double gamma_quantile(double a, double p) { return bm::gamma_p_inv(a, p, policy); }
double gamma_upper_quantile(double a, double q) { return bm::gamma_q_inv(a, q, policy); }
double log_gamma(double x) { return bm::lgamma(x, policy); }
double digamma(double x) { return bm::digamma(x, policy); }
double trigamma(double x) { return bm::trigamma(x, policy); }

double poisson_at_most(double k, double mu) { return k < 0 ? 0 : gamma_above(k + 1, mu); }
double poisson_at_least(double k, double mu) { return k <= 0 ? 1 : gamma_below(k, mu); }
double poisson_exactly(double k, double mu) { return k < 0 ? 0 : gamma_density(k + 1, mu); }

double beta_below(double a, double b, double x) { return bm::ibeta(a, b, x, policy); }
double beta_above(double a, double b, double x) { return bm::ibetac(a, b, x, policy); }
double beta_density(double a, double b, double x) { return bm::ibeta_derivative(a, b, x, policy); }
double beta_quantile(double a, double b, double p) { return bm::ibeta_inv(a, b, p, policy); }
double beta_upper_quantile(double a, double b, double q) { return bm::ibetac_inv(a, b, q, policy); }

double binomial_at_most(double k, double n, double p) {
  if (k < 0) return 0;
  return k >= n ? 1 : beta_above(k + 1, n - k, p);
}
double binomial_at_least(double k, double n, double p) {
  if (k <= 0) return 1;
  return k > n ? 0 : beta_below(k, n - k + 1, p);
}
double binomial_exactly(double k, double n, double p) {
  if (k < 0 || k > n) return 0;
  return beta_density(k + 1, n - k + 1, p) / (n + 1);
}

double chi_square_below(double x, double df) { return gamma_below(df / 2, x / 2); }
double chi_square_above(double x, double df) { return gamma_above(df / 2, x / 2); }
double chi_square_upper_quantile(double q, double df) { return 2 * gamma_upper_quantile(df / 2, q); }
double student_above(double t, double df) {
  const double tail = beta_below(df / 2, 0.5, df / (df + t * t)) / 2;
  return t >= 0 ? tail : 1 - tail;
}
double student_upper_quantile(double q, double df) {
  return bm::quantile(bm::complement(bm::students_t_distribution<double, OurPolicy>(df), q));
}
double f_above(double f, double df1, double df2) {
  if (!(f > 0)) return 1;
  return std::isinf(f) ? 0 : beta_below(df2 / 2, df1 / 2, df2 / (df2 + df1 * f));
}
double f_upper_quantile(double q, double df1, double df2) {
  const double x = beta_quantile(df2 / 2, df1 / 2, q);
  return x > 0 ? df2 * (1 - x) / (df1 * x) : infinity;
}

}  // namespace countsel
