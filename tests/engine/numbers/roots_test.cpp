// tests/engine/numbers/roots_test.cpp -- roots of flat, steep and broken monotone functions.
#include "engine/numbers/roots.hpp"

#include <doctest/doctest.h>

#include <cmath>
#include <initializer_list>
#include <limits>

namespace countsel {
namespace {

constexpr double infinity = std::numeric_limits<double>::infinity();

TEST_CASE("bracketed roots: smooth, steep, flat, stepped, infinite") {
  int calls = 0;
  const auto counted = [&](double x) {
    ++calls;
    return x * x * x - 2;
  };
  CHECK(bracketed_root(counted, 0, 10) == doctest::Approx(std::cbrt(2)).epsilon(1e-15));
  CHECK(calls < 30);
  CHECK(bracketed_root([](double x) { return 5 - std::exp(x); }, -40, 40) ==
        doctest::Approx(std::log(5)).epsilon(1e-15));
  CHECK(bracketed_root([](double x) { return std::pow(x - 1, 9); }, -3, 7.3) ==
        doctest::Approx(1).epsilon(1e-12));
  CHECK(bracketed_root([](double x) { return x < 0.3 ? -1.0 : 1.0; }, 0, 1) ==
        doctest::Approx(0.3).epsilon(1e-14));
  CHECK(bracketed_root([](double x) { return x <= 0 ? -infinity : std::log(x); }, -1, 50) ==
        doctest::Approx(1).epsilon(1e-14));
  CHECK(bracketed_root([](double x) { return x - 3e-200; }, 0, 1) == doctest::Approx(3e-200).epsilon(1e-14));
}

TEST_CASE("an end that is the root, no change of sign, NaN") {
  const auto line = [](double x) { return x - 2; };
  CHECK(bracketed_root(line, 2, 5) == 2);
  CHECK(bracketed_root(line, -5, 2) == 2);
  CHECK(std::isnan(bracketed_root(line, 3, 5)));
  CHECK(std::isnan(bracketed_root([](double) { return NAN; }, 0, 1)));
}

TEST_CASE("Newton's roots stay inside their bracket") {
  int calls = 0;
  const auto arctangent = [&](double x) {  // plain Newton runs away from 5
    ++calls;
    return ValueSlope{std::atan(x - 1), 1 / (1 + (x - 1) * (x - 1))};
  };
  CHECK(newton_root(arctangent, 5, -100, 100) == doctest::Approx(1).epsilon(1e-15));
  CHECK(calls < 30);
  const auto falling = [](double x) { return ValueSlope{std::exp(-x) - 1e-3, -std::exp(-x)}; };
  CHECK(newton_root(falling, 400, 0, 1000) == doctest::Approx(std::log(1000)).epsilon(1e-15));
  // no change of sign: the end nearest to one
  CHECK(newton_root([](double x) { return ValueSlope{x + 1, 1}; }, 1, 0, 2) < 1e-12);
}

TEST_CASE("roots against the logarithm: any guess, tiny and huge roots") {
  for (const double root : {1e-200, 3e-5, 1., 7e9, 2e250})
    for (const double off : {1e-9, 0.1, 1., 30., 1e12}) {
      const auto gap = [&](double x) { return ValueSlope{3 * std::log(x / root), 3}; };
      CHECK(log_newton_root(gap, root * off, 1) == doctest::Approx(root).epsilon(1e-13));
      const auto curved = [&](double x) {  // falls faster and faster, as an upper tail does
        return ValueSlope{1 - x / root, -x / root};
      };
      CHECK(log_newton_root(curved, root * off, 1) == doctest::Approx(root).epsilon(1e-13));
    }
  CHECK(std::isnan(log_newton_root([](double) { return ValueSlope{NAN, 1}; }, 1, 1)));
}

}  // namespace
}  // namespace countsel
