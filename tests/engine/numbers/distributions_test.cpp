// tests/engine/numbers/distributions_test.cpp -- every tail and quantile against 30-digit arithmetic, to 12
// digits.
#include "engine/numbers/distributions.hpp"

#include <doctest/doctest.h>

#include <cmath>
#include <fstream>
#include <functional>
#include <limits>
#include <map>
#include <sstream>
#include <string>
#include <vector>

#include "engine/numbers/large_shapes.hpp"

namespace countsel {
namespace {

using Arguments = std::vector<double>;
using Named = std::map<std::string, std::function<double(const Arguments&)>>;

using One = double (*)(double);
using Two = double (*)(double, double);
using Three = double (*)(double, double, double);

Named functions() {
  Named all;
  const auto one = [&](const char* name, One f) { all[name] = [f](const Arguments& a) { return f(a[0]); }; };
  const auto two = [&](const char* name, Two f) {
    all[name] = [f](const Arguments& a) { return f(a[0], a[1]); };
  };
  const auto three = [&](const char* name, Three f) {
    all[name] = [f](const Arguments& a) { return f(a[0], a[1], a[2]); };
  };
  one("normal_below", normal_below);
  one("normal_above", normal_above);
  one("normal_quantile", normal_quantile);
  one("normal_upper_quantile", normal_upper_quantile);
  one("log_gamma", log_gamma);
  one("digamma", digamma);
  one("trigamma", trigamma);
  two("gamma_below", gamma_below);
  two("gamma_above", gamma_above);
  two("gamma_density", gamma_density);
  two("gamma_quantile", gamma_quantile);
  two("gamma_upper_quantile", gamma_upper_quantile);
  two("poisson_at_most", poisson_at_most);
  two("poisson_at_least", poisson_at_least);
  two("poisson_exactly", poisson_exactly);
  three("beta_below", beta_below);
  three("beta_above", beta_above);
  three("beta_quantile", beta_quantile);
  three("beta_upper_quantile", beta_upper_quantile);
  three("binomial_at_most", static_cast<Three>(binomial_at_most));
  three("binomial_at_least", static_cast<Three>(binomial_at_least));
  two("chi_square_below", chi_square_below);
  two("chi_square_above", chi_square_above);
  two("chi_square_upper_quantile", chi_square_upper_quantile);
  two("student_above", student_above);
  two("student_upper_quantile", student_upper_quantile);
  three("f_above", f_above);
  three("f_upper_quantile", f_upper_quantile);
  all["beta_below_share"] = [](const Arguments& a) { return beta_tails(a[0], a[1], {a[2], a[3]}).below; };
  all["beta_above_share"] = [](const Arguments& a) { return beta_tails(a[0], a[1], {a[2], a[3]}).above; };
  return all;
}

TEST_CASE("tails, densities and quantiles to 12 digits: shapes to 1e9, tails to 1e-300") {
  const Named all = functions();
  std::map<std::string, int> seen;
  std::ifstream file(REFERENCE_DIR "/numbers/distributions.tsv");
  REQUIRE(file);
  std::string line;
  while (std::getline(file, line)) {
    if (line.empty() || line[0] == '#') continue;
    std::istringstream words(line);
    std::string name, word;
    words >> name;
    Arguments values;
    while (words >> word) values.push_back(std::stod(word));
    const double wobble = values.back();
    values.pop_back();
    const double wanted = values.back();
    values.pop_back();
    REQUIRE(all.contains(name));
    const double value = all.at(name)(values);
    ++seen[name];
    if (!(std::abs(value - wanted) <= (1e-12 + 1.01 * wobble) * std::abs(wanted))) {
      CAPTURE(line);
      CHECK(value == wanted);
    }
  }
  for (const auto& entry : all) {
    const auto& name = entry.first;
    CAPTURE(name);
    CHECK(seen[name] > 8);
  }
}

TEST_CASE("edges of the supports") {
  const double infinity = std::numeric_limits<double>::infinity();
  CHECK(gamma_below(3, 0) == 0);
  CHECK(gamma_above(3, 0) == 1);
  CHECK(gamma_below(600, infinity) == 1);
  CHECK(gamma_above(600, infinity) == 0);
  CHECK(gamma_quantile(3, 0) == 0);
  CHECK(gamma_upper_quantile(3, 0) == infinity);
  CHECK(poisson_at_most(-1, 3) == 0);
  CHECK(poisson_at_least(0, 3) == 1);
  CHECK(poisson_exactly(0, 0) == 1);
  CHECK(poisson_exactly(2, 0) == 0);
  CHECK(beta_below(2, 3, 0) == 0);
  CHECK(beta_below(2, 3000, 0) == 0);
  CHECK(beta_above(2, 3, 0) == 1);
  CHECK(beta_below(2, 3, 1) == 1);
  CHECK(beta_quantile(2, 3, 0) == 0);
  CHECK(beta_upper_quantile(2, 3, 0) == 1);
  CHECK(beta_upper_quantile_odds(2, 3, 0) == infinity);
  CHECK(binomial_at_most(5, 5, 0.3) == 1);
  CHECK(binomial_at_least(6, 5, 0.3) == 0);
  CHECK(binomial_exactly(0, 5, 0) == 1);
  CHECK(binomial_exactly(5, 5, 1) == 1);
  CHECK(binomial_exactly(2, 5, 0) == 0);
  CHECK(binomial_exactly(2, 5, 0.25) == doctest::Approx(10 * 27. / 1024).epsilon(1e-14));
  CHECK(student_above(infinity, 4) == 0);
  CHECK(student_above(1.3, infinity) == normal_above(1.3));
  CHECK(student_upper_quantile(0.5, 4) == 0);
  CHECK(f_above(0, 2, 3) == 1);
  CHECK(f_above(infinity, 2, 3) == 0);
  CHECK(std::isnan(gamma_quantile(3, NAN)));
  CHECK(std::isnan(student_above(NAN, 3)));
}

TEST_CASE("a beta quantile's odds keep their digits where the quantile is 1") {
  // 1 - x is the lower quantile of the groups' places changed: x = 1 - (1 - q)^(1/b) for shape 1 and b.
  const double odds = beta_upper_quantile_odds(1e9, 1, 1e-5);
  const double rest = -std::expm1(std::log1p(-1e-5) / 1e9);
  CHECK(odds == doctest::Approx((1 - rest) / rest).epsilon(1e-12));
}

TEST_CASE("the logarithm's gap and Stirling's error") {
  CHECK(log1p_gap(0) == 0);
  CHECK(log1p_gap(1e-9) == doctest::Approx(0.5e-18 * (1 - 2e-9 / 3)).epsilon(1e-15));
  CHECK(log1p_gap(-0.59) == doctest::Approx(-0.59 - std::log(0.41)).epsilon(1e-14));
  CHECK(log1p_gap(1.19) == doctest::Approx(1.19 - std::log(2.19)).epsilon(1e-14));
  CHECK(log1p_gap(5) == doctest::Approx(5 - std::log(6)).epsilon(1e-15));
  for (const double a : {0.5, 3., 15.9, 16., 40.})
    CHECK(stirling_error(a) == doctest::Approx(std::lgamma(a + 1) - (a + 0.5) * std::log(a) + a -
                                               0.5 * std::log(2 * 3.14159265358979323846))
                                   .epsilon(1e-11));
}

}  // namespace
}  // namespace countsel
