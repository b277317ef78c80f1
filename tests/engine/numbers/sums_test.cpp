// tests/engine/numbers/sums_test.cpp -- sums that keep their digits.
#include "engine/numbers/sums.hpp"

#include <doctest/doctest.h>

#include <cmath>
#include <limits>
#include <vector>

namespace countsel {
namespace {

TEST_CASE("what cancels leaves the rest") {
  CHECK(sum(std::vector<double>{1e100, 1, -1e100}) == 1);
  CHECK(sum(std::vector<double>{1, 1e100, 1, -1e100}) == 2);
  CHECK(sum(std::vector<double>{}) == 0);
  std::vector<double> tenths(1'000'000, 0.1);
  CHECK(sum(tenths) == doctest::Approx(100000).epsilon(1e-16));
  tenths.insert(tenths.begin(), 1e16);
  tenths.push_back(-1e16);
  CHECK(sum(tenths) == doctest::Approx(100000).epsilon(1e-14));
}

TEST_CASE("infinity and NaN as plain addition gives them") {
  const double infinity = std::numeric_limits<double>::infinity();
  CHECK(sum(std::vector<double>{1, infinity, 2}) == infinity);
  CHECK(sum(std::vector<double>{1e308, 1e308, 5}) == infinity);
  CHECK(std::isnan(sum(std::vector<double>{infinity, -infinity})));
  CHECK(std::isnan(sum(std::vector<double>{1, NAN})));
}

}  // namespace
}  // namespace countsel
