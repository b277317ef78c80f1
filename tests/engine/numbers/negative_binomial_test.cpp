// tests/engine/numbers/negative_binomial_test.cpp -- chances, tails, quantiles and slopes.
#include "engine/numbers/negative_binomial.hpp"

#include <doctest/doctest.h>

#include <cmath>
#include <fstream>
#include <limits>
#include <sstream>
#include <string>

#include "engine/numbers/distributions.hpp"

namespace countsel {
namespace {

constexpr double infinity = std::numeric_limits<double>::infinity();

double relative(double got, double wanted) { return std::abs(got / wanted - 1); }

TEST_CASE("chances and both tails agree with mpmath to 12 digits") {
  std::ifstream file(REFERENCE_DIR "/numbers/negative_binomial.tsv");
  REQUIRE(file);
  int read = 0;
  for (std::string line; std::getline(file, line);) {
    if (line.empty() || line[0] == '#') continue;
    std::istringstream cells(line);
    std::string text[6];
    for (std::string& cell : text) cells >> cell;
    const double k = std::stod(text[0]), shape = std::stod(text[1]), mean = std::stod(text[2]);
    const double chance = std::stod(text[3]), low = std::stod(text[4]), high = std::stod(text[5]);
    CAPTURE(k);
    CAPTURE(shape);
    CAPTURE(mean);
    CHECK(relative(negative_binomial_exactly(k, shape, mean), chance) < 1e-12);
    // A logarithm of -700 known to 16 digits gives its chance to 13.
    CHECK(std::abs(negative_binomial_log_exactly(k, shape, mean) - std::log(chance)) < 1e-12);
    if (!std::isnan(low)) CHECK(relative(negative_binomial_at_most(k, shape, mean), low) < 1e-12);
    if (!std::isnan(high)) CHECK(relative(negative_binomial_at_least(k, shape, mean), high) < 1e-12);
    ++read;
  }
  CHECK(read > 240);
}

TEST_CASE("an infinite shape is Poisson, and a mean of 0 is 0 for sure") {
  CHECK(negative_binomial_at_least(7, infinity, 2.5) == poisson_at_least(7, 2.5));
  CHECK(negative_binomial_exactly(3, infinity, 2.5) == poisson_exactly(3, 2.5));
  CHECK(negative_binomial_exactly(0, 2, 0) == 1);
  CHECK(negative_binomial_at_least(1, 2, 0) == 0);
  CHECK(negative_binomial_at_most(-1, 2, 3) == 0);
  CHECK(negative_binomial_at_least(0, 2, 3) == 1);
  CHECK(relative(negative_binomial_at_least(9, 1e17, 2.5), poisson_at_least(9, 2.5)) < 1e-13);
}

TEST_CASE("a quantile is the first whole number whose tail is reached") {
  for (const double shape : {0.05, 1.0, 30.0, 1e8, infinity})
    for (const double mean : {0.02, 3.0, 400.0, 1e6})
      for (const double p : {1e-12, 0.001, 0.025, 0.5, 0.975, 0.999}) {
        CAPTURE(shape);
        CAPTURE(mean);
        CAPTURE(p);
        const double k = negative_binomial_quantile(p, shape, mean);
        CHECK(negative_binomial_at_most(k, shape, mean) >= p);
        CHECK(negative_binomial_at_most(k - 1, shape, mean) < p);
        const double high = negative_binomial_upper_quantile(p, shape, mean);
        CHECK(negative_binomial_at_least(high + 1, shape, mean) <= p);
        if (high > 0) CHECK(negative_binomial_at_least(high, shape, mean) > p);
      }
}

TEST_CASE("the digamma's rise is the sum it stands for") {
  for (const double a : {1e-6, 0.3, 5.0, 19.0, 25.0, 1e4})
    for (const double k : {0.0, 1.0, 39.0, 41.0, 1000.0, 50000.0}) {
      long double total = 0;
      for (double j = k - 1; j >= 0; --j) total += 1.0L / (static_cast<long double>(a) + j);
      CAPTURE(a);
      CAPTURE(k);
      CHECK(std::abs(digamma_rise(a, k) - static_cast<double>(total)) <= 2e-15 * static_cast<double>(total));
    }
}

TEST_CASE("the slope in the spread is that of the log chance, also at the Poisson edge") {
  for (const double y : {0.0, 1.0, 7.0, 60.0, 900.0})
    for (const double mean : {0.3, 8.0, 500.0}) {
      CAPTURE(y);
      CAPTURE(mean);
      const double edge = negative_binomial_spread_slope(y, 0, mean);
      CHECK(edge == doctest::Approx(((y - mean) * (y - mean) - y) / 2).epsilon(1e-11));
      CHECK(negative_binomial_spread_slope(y, 1e-13, mean) == doctest::Approx(edge).epsilon(1e-6));
      for (const double spread : {1e-5, 0.01, 0.04, 0.3, 4.0, 200.0}) {
        CAPTURE(spread);
        const double found = negative_binomial_spread_slope(y, spread, mean);
        const double step = 1e-4;
        const auto at = [&](double s, double m) { return negative_binomial_log_exactly(y, 1 / s, m); };
        const double up = at(spread * (1 + step), mean), down = at(spread * (1 - step), mean);
        const double far = at(spread * (1 + 2 * step), mean) - at(spread * (1 - 2 * step), mean);
        const double slope = (8 * (up - down) - far) / (12 * step * spread);
        CHECK(std::abs(found - slope) < 1e-8 * std::abs(slope) + 1e-10 / spread);
      }
    }
}

}  // namespace
}  // namespace countsel
