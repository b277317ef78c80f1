// tests/engine/numbers/exact_test.cpp -- products, sums and shares without rounding.
#include "engine/numbers/exact.hpp"

#include <doctest/doctest.h>

#include <cmath>
#include <initializer_list>

#include "engine/numbers/share.hpp"

namespace countsel {
namespace {

TEST_CASE("two_sum and two_product give the rounding back") {
  const Pair sum = two_sum(1e16, 1.25);
  CHECK(sum.high == 1e16 + 1.25);
  CHECK((sum.high - 1e16) + sum.low == 1.25);
  const double a = 1 + std::ldexp(1, -30), b = 1 + std::ldexp(1, -31);  // product needs 62 bits
  const Pair product = two_product(a, b);
  CHECK(product.high + product.low == product.high);
  CHECK(product.low == std::ldexp(1, -61));
}

TEST_CASE("a difference of nearly equal products keeps its digits") {
  // (n + 1)(n - 1) - n n = -1
  for (const double n : {3., 1e5, 94906267., 4e15}) CHECK(product_difference(n + 1, n - 1, n, n) == -1);
  CHECK(product_difference(3, 4, 5, 2) == 2);
}

TEST_CASE("shares: parts, extremes, distance from the expected") {
  CHECK(share_of(0.25).chance() == 0.25);
  CHECK(share_of(1e-20).rest == 1);
  CHECK(share_of(1e-20).rest_low == -1e-20);
  CHECK(share_of_odds(1, 1e300, 1e300).chance() == 0.5);
  CHECK(share_of_odds(1e-200, 1e-200, 1).part > 0);  // beyond a double's range
  CHECK(share_of_odds(1e-200, 1e-200, 1).chance() < 1e-300);
  CHECK(share_of_odds(3, 1e300, 1e300).chance() == 0.75);
  CHECK(share_of_odds(1, 3, 1).turned().chance() == 0.25);
  // 1e9 of 3e9 at a third, written as 1 : 2, is as expected; one more is two thirds above it
  CHECK(above_expected(1e9, 2e9, {1, 2}) == 0);
  CHECK(above_expected(1e9 + 1, 2e9, {1, 2}) == doctest::Approx(2. / 3).epsilon(1e-15));
  // 0.3 is not a double: the part that a product with it loses counts at 1e15
  const Share share = share_of_odds(0.3, 0.1, 0.7);
  CHECK(above_expected(3e15, 7e16, share) != 0);
  CHECK(std::abs(above_expected(3e15, 7e16, share)) < 10);
}

}  // namespace
}  // namespace countsel
