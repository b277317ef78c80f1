// tests/protocol/wording/numbers_test.cpp -- rounding for people, by the width of the limits.
#include "protocol/wording/numbers.hpp"

#include <doctest/doctest.h>

#include <cmath>
#include <limits>

namespace countsel {
namespace {

constexpr double inf = std::numeric_limits<double>::infinity();

TEST_CASE("fixed decimals with commas between thousands") {
  CHECK(fixed_text(0, 0) == "0");
  CHECK(fixed_text(12345.678, 1) == "12,345.7");
  CHECK(fixed_text(-1234567, 0) == "-1,234,567");
  CHECK(fixed_text(999.96, 1) == "1,000.0");
  CHECK(fixed_text(-0.04, 1) == "0.0");
  CHECK(fixed_text(123, 2) == "123.00");
}

TEST_CASE("significant digits, rounded before the exponent is chosen") {
  CHECK(significant_text(9.96, 2) == "10");
  CHECK(significant_text(0.00312, 2) == "0.0031");
  CHECK(significant_text(1234, 2) == "1,200");
  CHECK(significant_text(0.0996, 2) == "0.10");
  CHECK(significant_text(3.14e-12, 2) == "3.1e-12");
  CHECK(significant_text(-2.5e17, 2) == "-2.5e17");
  CHECK(significant_text(0, 3) == "0");
  CHECK(significant_text(5, 3) == "5.00");
}

TEST_CASE("given numbers keep their digits") {
  CHECK(given_text(3400) == "3,400");
  CHECK(given_text(12.5) == "12.5");
  CHECK(given_text(0.1) == "0.1");
  CHECK(given_text(1e9) == "1,000,000,000");
  CHECK(given_text(1234567.25) == "1,234,567.25");
  CHECK(given_text(0.000123456789) == "0.000123457");
}

TEST_CASE("levels and p-values") {
  CHECK(percent_text(0.95) == "95%");
  CHECK(percent_text(0.9973) == "99.73%");
  CHECK(percent_text(0.999) == "99.9%");
  CHECK(p_text(0.0312) == "0.031");
  CHECK(p_text(0.5) == "0.50");
  CHECK(p_text(0.00012) == "0.0001");
  CHECK(p_text(0.00009) == "less than 0.0001");
  CHECK(p_text(1) == "more than 0.99");
}

TEST_CASE("an estimate carries as many digits as its limits support") {
  CHECK(shown_limits(5.8333, 2.3453, 12.0189) == "5.8 (2.3 to 12.0)");
  CHECK(shown_limits(583.33, 234.53, 1201.89) == "583 (235 to 1,202)");
  CHECK(shown_limits(0.0058333, 0.0023453, 0.0120189) == "0.0058 (0.0023 to 0.0120)");
  CHECK(shown_limits(0, 0, 4.611) == "0 (0 to 4.6)");
  CHECK(shown_limits(1.00001, 1.000005, 1.000015) == "1.000010 (1.000005 to 1.000015)");
}

TEST_CASE("limits that are none") {
  CHECK(shown_limits(2.5, 0.6, inf).find("no limit") != std::string::npos);
  const auto rounded = round_limits(2.5, std::nan(""), std::nan(""));
  CHECK(rounded.value == "2.5");
  CHECK(rounded.low == "?");
}

}  // namespace
}  // namespace countsel
