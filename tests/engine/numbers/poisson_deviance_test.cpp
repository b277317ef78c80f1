// tests/engine/numbers/poisson_deviance_test.cpp -- the deviance against its definition and its series.
#include "engine/numbers/poisson_deviance.hpp"

#include <doctest/doctest.h>

#include <cmath>
#include <initializer_list>
#include <limits>

#include "engine/numbers/distributions.hpp"

namespace countsel {
namespace {

TEST_CASE("half deviance agrees with its definition far from the mean") {
  for (const double count : {1.0, 3.0, 40.0, 1e6}) {
    for (const double mean : {0.1 * count, 0.5 * count, 2 * count, 30 * count}) {
      const double plain = count * std::log(count / mean) - (count - mean);
      CHECK(half_deviance(count, mean) == doctest::Approx(plain).epsilon(1e-13));
    }
  }
}

TEST_CASE("half deviance keeps its digits near the mean") {
  // (d^2 / 2m)(1 - d / 3m + d^2 / 6m^2 ...) for count = m + d.
  for (const double mean : {1e3, 1e6, 1e9}) {
    const double d = 1, e = d / mean;
    const double series = d * e / 2 * (1 - e / 3 + e * e / 6 - e * e * e / 10);
    CHECK(half_deviance(mean + d, mean) == doctest::Approx(series).epsilon(1e-14));
  }
  // Both formulas at the point where one takes over.
  const double a = half_deviance(1100, 900.0001), b = half_deviance(1100, 899.9999);
  CHECK(b - a == doctest::Approx(0.0002 * (1100.0 / 900 - 1)).epsilon(1e-6));
}

TEST_CASE("half deviance at its edges") {
  CHECK(half_deviance(0, 2.5) == 2.5);
  CHECK(half_deviance(0, 0) == 0);
  CHECK(half_deviance(7, 7) == 0);
  CHECK(std::isinf(half_deviance(1, 0)));
  CHECK(deviance_root(3, 5) < 0);
  CHECK(deviance_root(5, 3) > 0);
}

TEST_CASE("log Poisson chance agrees with the chance and goes on where that underflows") {
  for (const double mean : {0.3, 7.0, 450.0})
    for (const double k : {0.0, 1.0, 5.0, 15.0, 16.0, 300.0})
      if (poisson_exactly(k, mean) > 1e-290)
        CHECK(log_poisson(k, mean) == doctest::Approx(std::log(poisson_exactly(k, mean))).epsilon(1e-12));
  CHECK(log_poisson(0, 5000) == -5000);
  // log(1000! ) = 5912.128178488163 (mpmath); mean 1e-3.
  CHECK(log_poisson(1000, 1e-3) ==
        doctest::Approx(1000 * std::log(1e-3) - 1e-3 - 5912.128178488163).epsilon(1e-13));
}

}  // namespace
}  // namespace countsel
