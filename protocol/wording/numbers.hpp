// protocol/wording/numbers.hpp -- numbers as they are said and shown: no digit that the limits do not
// support.
//
// Checked by: tests/protocol/wording/numbers_test.cpp.
#pragma once

#include <string>

namespace countsel {

/// With `decimals` decimals and a comma between thousands: "12,345.6".
std::string fixed_text(double value, int decimals);
/// With `digits` significant digits, without an exponent where that is readable: "0.0031", "1,200",
/// "3.1e-12".
std::string significant_text(double value, int digits);
/// A number that was given rather than estimated (a count, an exposure, a base): all its digits up to
/// six after the point, with a comma between thousands.
std::string given_text(double value);
/// "95%", "99.73%".
std::string percent_text(double share);
/// "0.031", "less than 0.0001", "more than 0.99".
std::string p_text(double p);
/// "p = 0.031", "p less than 0.0001".
std::string p_said(double p);

/// An estimate between its limits, each rounded to what the width of the limits supports.
struct RoundedLimits {
  std::string value, low, high;
};
RoundedLimits round_limits(double value, double low, double high);
/// "5.8 (2.3 to 12.0)"; "no limit" stands for an infinite one, "?" for one that has no value.
std::string shown_limits(double value, double low, double high);

}  // namespace countsel
